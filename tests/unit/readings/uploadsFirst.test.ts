import { describe, expect, it } from 'vitest'
import { createUploadsFirst } from '../../../server/utils/analysis/uploadsFirst'

/** A piece of work that ends when told to, and notes when it began. */
function piece(name: string, log: string[]) {
  let end!: () => void
  const done = new Promise<void>((resolve) => {
    end = resolve
  })
  return { work: async () => {
    log.push(name)
    await done
  }, end }
}
const settle = () => new Promise(resolve => setTimeout(resolve, 0))

describe('whose turn it is at the analysis', () => {
  it('lets uploads start at once and background work wait until none is under way', async () => {
    const log: string[] = []
    const queue = createUploadsFirst()
    const [first, second, old] = ['upload 1', 'upload 2', 'old'].map(name => piece(name, log))
    const all = [queue.take(false, first!.work), queue.take(true, old!.work), queue.take(false, second!.work)]
    await settle()
    expect(log).toEqual(['upload 1', 'upload 2'])
    first!.end()
    await settle()
    expect(log).toHaveLength(2)
    second!.end()
    await settle()
    expect(log).toEqual(['upload 1', 'upload 2', 'old'])
    old!.end()
    await Promise.all(all)
  })

  it('takes background work one piece at a time, and holds no upload up for it', async () => {
    const log: string[] = []
    const queue = createUploadsFirst()
    const [one, two, upload] = ['old 1', 'old 2', 'upload'].map(name => piece(name, log))
    const all = [queue.take(true, one!.work), queue.take(true, two!.work), queue.take(false, upload!.work)]
    await settle()
    expect(log).toEqual(['old 1', 'upload'])
    one!.end()
    await settle()
    expect(log).toEqual(['old 1', 'upload'])
    upload!.end()
    await settle()
    expect(log).toEqual(['old 1', 'upload', 'old 2'])
    two!.end()
    await Promise.all(all)
  })

  it('goes on after work that failed', async () => {
    const queue = createUploadsFirst()
    const fails = async () => {
      throw new Error('broken')
    }
    await expect(queue.take(true, fails)).rejects.toThrow('broken')
    await expect(queue.take(false, fails)).rejects.toThrow('broken')
    expect(await queue.take(true, async () => 'read')).toBe('read')
  })
})
