/** Whose turn it is at the analysis threads: uploads at once, background work when no upload is being read. */
export interface UploadsFirst {
  take<T>(background: boolean, work: () => Promise<T>): Promise<T>
}

/**
 * Uploads never wait for anything but each other. Background work waits for its turn: one piece at a time, and only while
 * no upload is under way; an upload that comes meanwhile finds the other thread free.
 */
export function createUploadsFirst(): UploadsFirst {
  let uploads = 0
  let working = false
  const waiting: (() => void)[] = []
  const next = () => {
    if (uploads === 0 && !working) waiting.shift()?.()
  }
  async function upload<T>(work: () => Promise<T>): Promise<T> {
    uploads++
    try {
      return await work()
    } finally {
      uploads--
      next()
    }
  }
  async function inBackground<T>(work: () => Promise<T>): Promise<T> {
    while (uploads > 0 || working) await new Promise<void>(resolve => waiting.push(resolve))
    working = true
    try {
      return await work()
    } finally {
      working = false
      next()
    }
  }
  return { take: (background, work) => background ? inBackground(work) : upload(work) }
}
