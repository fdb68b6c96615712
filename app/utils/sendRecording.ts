import type { RecordingAnswer } from '#shared/schemas/reading'
import type { ApiProblem } from '~/composables/useApi'

/** What travels with the sound. */
export interface RecordingMeta {
  strike: 'centre' | 'edge' | 'round'
  rod: number
  firstRod: number
  centreDamped: boolean
  temperatureC: number
  note: string
  privateToMaker: boolean
}

export type SendOutcome = { kind: 'answer', answer: RecordingAnswer } | { kind: 'problem', problem: ApiProblem }

function formOf(sound: Blob, name: string, meta: RecordingMeta): FormData {
  const form = new FormData()
  // Fields first: the server reads the stream in order.
  form.set('strike', meta.strike)
  if (meta.strike === 'edge') form.set('rod', String(meta.rod))
  if (meta.strike === 'round') form.set('firstRod', String(meta.firstRod))
  form.set('centreDamped', String(meta.centreDamped))
  form.set('temperatureC', String(meta.temperatureC))
  if (meta.note.trim()) form.set('note', meta.note.trim())
  form.set('privateToMaker', String(meta.privateToMaker))
  form.set('file', sound, name)
  return form
}

/** Sends one recording. XMLHttpRequest, because fetch tells nothing of how much has been sent. */
export function sendRecording(headId: string, sound: Blob, name: string, meta: RecordingMeta, onSent: (share: number) => void): Promise<SendOutcome> {
  return new Promise((resolve) => {
    const request = new XMLHttpRequest()
    const fail = (status: number, message: string, issues: Record<string, string> = {}) => resolve({ kind: 'problem', problem: { status, message, issues } })
    request.upload.onprogress = event => event.lengthComputable && onSent(event.loaded / event.total)
    request.upload.onload = () => onSent(1)
    request.onerror = () => fail(0, 'The connection broke before the file was through. It was not kept; send it again.')
    request.onabort = () => fail(0, 'Sending was stopped. Nothing was kept.')
    request.onload = () => {
      const body = request.response as (RecordingAnswer & { message?: string, data?: { issues?: { path: string, message: string }[] } }) | null
      if (body?.recording) return resolve({ kind: 'answer', answer: body })
      fail(request.status, body?.message ?? 'The server could not take this file. Try again in a moment.', Object.fromEntries((body?.data?.issues ?? []).map(issue => [issue.path, issue.message])))
    }
    request.open('POST', `/api/heads/${headId}/recordings`)
    request.responseType = 'json'
    request.send(formOf(sound, name, meta))
  })
}
