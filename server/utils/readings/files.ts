import { randomUUID } from 'node:crypto'
import { mkdir, rename, rm } from 'node:fs/promises'
import { join } from 'node:path'

/** Where recordings lie: `tmp` while they arrive, `recordings` once a row knows them. Both on one disk, so a rename is whole. */
export interface RecordingFolders { tmp: string, recordings: string }

export const recordingFolders = (dataDir: string): RecordingFolders => ({ tmp: join(dataDir, 'tmp'), recordings: join(dataDir, 'recordings') })

const swept = new Map<string, Promise<void>>()

/** A name of our own for a file that arrives. What a killed server left behind goes at the first call. */
export async function ensureTempPath({ tmp }: RecordingFolders): Promise<string> {
  const sweep = swept.get(tmp) ?? rm(tmp, { recursive: true, force: true }).then(async () => void await mkdir(tmp, { recursive: true, mode: 0o700 }))
  swept.set(tmp, sweep)
  await sweep
  return join(tmp, `${randomUUID()}.part`)
}

/** Path below `recordings` for an id: 256 folders keep each of them short over a million files. */
export const recordingPath = (id: string) => join(id.slice(0, 2), `${id}.wav`)

export async function keepFile(folders: RecordingFolders, tempPath: string, filePath: string): Promise<void> {
  const target = join(folders.recordings, filePath)
  await mkdir(join(target, '..'), { recursive: true, mode: 0o700 })
  await rename(tempPath, target)
}

export const dropFile = (folders: RecordingFolders, filePath: string) => rm(join(folders.recordings, filePath), { force: true })
