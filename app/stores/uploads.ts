import { defineStore } from 'pinia'
import { MAX_UPLOAD_BYTES, type ReadingView } from '#shared/schemas/reading'
import { type RecordingMeta, sendRecording } from '~/utils/sendRecording'
import { decodeToWav, isWav } from '~/utils/wavFile'

export type UploadState = 'waiting' | 'converting' | 'sending' | 'analysing' | 'read' | 'refused' | 'failed'

export interface Upload {
  id: number
  name: string
  /** Instrument and side, for the list. */
  where: string
  headId: string
  state: UploadState
  /** Share of the file that is through, 0 to 1. */
  sent: number
  /** Why it was refused or failed, and what to do. */
  message: string
  reading: ReadingView | null
}

const UNDER_WAY: readonly UploadState[] = ['waiting', 'converting', 'sending', 'analysing']

/** Recordings on their way to the bench, one after the other. They live in this page only: a reload loses what is not through. */
export const useUploads = defineStore('uploads', () => {
  const items = ref<Upload[]>([])
  const sources = new Map<number, { sound: Blob, meta: RecordingMeta }>()
  let nextId = 1
  let running = false

  const underWay = computed(() => items.value.filter(item => UNDER_WAY.includes(item.state)))
  const counted = computed(() => ({ done: items.value.length - underWay.value.length, all: items.value.length }))

  /** @returns the ids of what was added, in order */
  function add(files: readonly { sound: Blob, name: string }[], headId: string, where: string, meta: RecordingMeta): number[] {
    const added = files.map(({ sound, name }) => {
      const id = nextId++
      sources.set(id, { sound, meta: { ...meta } })
      items.value.push({ id, name, where, headId, state: 'waiting', sent: 0, message: '', reading: null })
      return id
    })
    void run()
    return added
  }

  function retry(id: number) {
    const item = items.value.find(entry => entry.id === id)
    if (!item || !sources.has(id)) return
    Object.assign(item, { state: 'waiting', sent: 0, message: '' })
    void run()
  }

  /** Takes what is finished off the list. */
  function clearDone() {
    for (const item of items.value) if (!UNDER_WAY.includes(item.state)) sources.delete(item.id)
    items.value = [...underWay.value]
  }

  async function run() {
    if (running) return
    running = true
    try {
      for (;;) {
        const item = items.value.find(entry => entry.state === 'waiting')
        if (!item) return
        try {
          await send(item)
        } catch {
          // Reading the file or turning it into WAV broke: the others still go on.
          Object.assign(item, { state: 'failed', message: 'This file could not be read here. Choose it again, or save it as WAV first.' })
        }
      }
    } finally {
      running = false
    }
  }

  const refuse = (item: Upload, message: string) => Object.assign(item, { state: 'refused', message })

  async function send(item: Upload) {
    const source = sources.get(item.id)
    if (!source) return
    let { sound } = source
    let { name } = item
    if (sound.size === 0) return refuse(item, 'This file is empty.')
    if (!await isWav(sound)) {
      item.state = 'converting'
      const decoded = await decodeToWav(sound)
      if (!decoded) return refuse(item, 'This browser cannot read this file as sound. Save it as WAV, or record here.')
      sound = decoded
      name = `${name.replace(/\.[^.]*$/, '')}.wav`
    }
    if (sound.size > MAX_UPLOAD_BYTES) return refuse(item, `This recording is ${Math.round(sound.size / 1048576)} MB as WAV; at most 50 MB are taken. Cut it to the taps.`)
    item.state = 'sending'
    const outcome = await sendRecording(item.headId, sound, name, source.meta, (share) => {
      item.sent = share
      if (share >= 1) item.state = 'analysing'
    })
    if (outcome.kind === 'problem') return Object.assign(item, { state: 'failed', message: outcome.problem.message })
    const { reading, recording } = outcome.answer
    if (!reading) return refuse(item, recording.refusal?.message ?? 'No reading could be had from this recording. Tap again.')
    Object.assign(item, { state: 'read', reading })
    sources.delete(item.id)
  }
  return { items, underWay, counted, add, retry, clearDone }
})
