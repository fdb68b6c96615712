/** Bytes first to last, both counted, of a file. */
export interface ByteRange { first: number, last: number }

/**
 * What a Range header asks of a file: a part, 'whole' where there is no header or one that may be ignored (another unit,
 * several parts, nonsense), or 'beyond' where no byte of the file is meant.
 * Source: RFC 9110, section 14.1.2 and 14.2.
 */
export function readRange(header: string | undefined, size: number): ByteRange | 'whole' | 'beyond' {
  const match = /^bytes=(\d*)-(\d*)$/.exec(header?.trim() ?? '')
  if (!match || (!match[1] && !match[2])) return 'whole'
  if (!match[1]) {
    const count = Math.min(Number(match[2]), size)
    return count > 0 ? { first: size - count, last: size - 1 } : 'beyond'
  }
  const first = Number(match[1])
  if (match[2] && Number(match[2]) < first) return 'whole'
  if (first >= size) return 'beyond'
  return { first, last: match[2] ? Math.min(Number(match[2]), size - 1) : size - 1 }
}
