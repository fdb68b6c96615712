import { chmod, mkdir, open, rename, stat } from 'node:fs/promises'
import { closeSync, openSync, readFileSync, renameSync, statSync } from 'node:fs'

const MAX_LOG_BYTES = 10 * 1024 * 1024

/** Writes beside the file and renames, so that a reader or a crash never meets half of it. */
export async function writeWhole(file: string, text: string, mode = 0o600): Promise<void> {
  const part = `${file}.part`
  const handle = await open(part, 'w', mode)
  try {
    await handle.writeFile(text)
  } finally {
    await handle.close()
  }
  await chmod(part, mode)
  await rename(part, file)
}

/** The parsed JSON of a file, or undefined when there is no such file. A damaged file throws with its name. */
export function readJson(file: string): unknown {
  let text: string
  try {
    text = readFileSync(file, 'utf8')
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ENOENT') return undefined
    throw error
  }
  try {
    return JSON.parse(text)
  } catch {
    throw new Error(`${file} is not valid JSON. Move it away to start without it.`)
  }
}

/** A folder that others may pass through but not list: the database's user must reach its own folder inside. */
export async function ensureFolder(folder: string, mode = 0o711): Promise<void> {
  const there = await stat(folder).catch(() => undefined)
  if (there) return
  await mkdir(folder, { recursive: true })
  await chmod(folder, mode)
}

/** Opens a log to append to; one that has grown large becomes `.old` first. */
export function openLog(file: string): { fd: number, close: () => void } {
  if ((statSync(file, { throwIfNoEntry: false })?.size ?? 0) > MAX_LOG_BYTES) renameSync(file, `${file}.old`)
  const fd = openSync(file, 'a', 0o600)
  return { fd, close: () => closeSync(fd) }
}

/** The last lines of a log, to show why something failed. */
export function lastLines(file: string, count = 15): string {
  try {
    return readFileSync(file, 'utf8').trimEnd().split('\n').slice(-count).join('\n')
  } catch {
    return ''
  }
}
