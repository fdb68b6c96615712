import { open } from 'node:fs/promises'
import { join } from 'node:path'
import type { Readable } from 'node:stream'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely } from '../core/db'
import { notFound } from '../core/errors'
import type { RecordingFolders } from './files'
import { getAudibleRecording } from './find'
import { readRange } from './range'

export interface Audio { status: 200 | 206 | 416, headers: Record<string, string>, stream: Readable | null }

/** A recording to play, or the part of it that a Range header asks for. @throws DomainError not-found, not-allowed */
export async function openAudio(db: Kysely<DB>, folders: RecordingFolders, id: string, user: Pick<SignedInUser, 'id' | 'role'>, rangeHeader: string | undefined): Promise<Audio> {
  const recording = await getAudibleRecording(db, id, user)
  const file = await open(join(folders.recordings, recording.file_path)).catch(() => {
    throw notFound('The sound of this recording')
  })
  const { size } = await file.stat()
  const range = readRange(rangeHeader, size)
  const headers = {
    'content-type': 'audio/wav',
    'accept-ranges': 'bytes',
    // The browser may keep it for one look at the page; the session is asked again after that.
    'cache-control': 'private, max-age=60',
    'content-disposition': `inline; filename="recording-${id}.wav"`,
  }
  if (range === 'beyond') {
    await file.close()
    return { status: 416, headers: { ...headers, 'content-range': `bytes */${size}` }, stream: null }
  }
  const { first, last } = range === 'whole' ? { first: 0, last: size - 1 } : range
  return {
    status: range === 'whole' ? 200 : 206,
    headers: { ...headers, 'content-length': String(last - first + 1), ...(range !== 'whole' && { 'content-range': `bytes ${first}-${last}/${size}` }) },
    // Closes the file at its end, or when the player goes away.
    stream: file.createReadStream({ start: first, end: last }),
  }
}
