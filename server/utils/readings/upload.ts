import { createHash } from 'node:crypto'
import { createWriteStream } from 'node:fs'
import { rm } from 'node:fs/promises'
import type { IncomingMessage } from 'node:http'
import { type Readable, Transform } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import busboy from 'busboy'
import { MAX_UPLOAD_BYTES } from '../../../shared/schemas/reading'
import { RefusalError } from '../analysis/refusal'
import { DomainError } from '../core/errors'

/*
 * Security model: the size is refused by Content-Length before a byte is read and counted while reading; the client's
 * file name and type are not used; the file lands under a name of ours and is removed by whoever does not keep it.
 */

/** Boundaries and text fields of a multipart body around the file. */
const MULTIPART_OVERHEAD = 64 * 1024

export interface ReceivedUpload { fields: Record<string, string>, tempPath: string, byteCount: number, sha256: string }

export const tooLarge = () => new RefusalError('too-large', `A recording may have ${MAX_UPLOAD_BYTES / 1024 / 1024} MB. Cut it down to the taps, or save it as mono.`)

/**
 * Streams the one file of a multipart body to `tempPath` and collects its text fields.
 * @throws RefusalError too-large
 * @throws DomainError wrong-media-type, bad-input
 */
export async function receiveUpload(request: IncomingMessage, tempPath: string): Promise<ReceivedUpload> {
  if (Number(request.headers['content-length'] ?? 0) > MAX_UPLOAD_BYTES + MULTIPART_OVERHEAD) throw tooLarge()
  const parser = openParser(request)
  const fields: Record<string, string> = {}
  let file: Promise<Omit<ReceivedUpload, 'fields' | 'tempPath'>> | undefined
  try {
    await new Promise<void>((resolve, reject) => {
      const refuse = (message: string) => reject(new DomainError('bad-input', message))
      parser.on('field', (name, value, info) => {
        if (info.nameTruncated || info.valueTruncated) refuse('One of the fields is too long.')
        // An empty box of a form says nothing, which is not the same as an empty answer.
        else if (value !== '') fields[name] = value
      })
      parser.on('file', (name, stream) => {
        if (name !== 'file' || file) {
          stream.on('error', () => undefined).resume()
          return refuse(file ? 'Send one recording at a time.' : 'Send the recording in the field "file".')
        }
        file = writeCounted(stream, tempPath)
        file.catch(reject)
      })
      parser.on('filesLimit', () => refuse('Send one recording at a time.'))
      parser.on('partsLimit', () => refuse('This form has too many parts.'))
      parser.on('error', () => refuse('The upload broke off or is not a whole form. Send it again.'))
      parser.on('close', resolve)
      request.on('close', () => {
        if (!request.complete) refuse('The upload broke off. Send it again.')
      })
      request.pipe(parser)
    })
    if (!file) throw new DomainError('bad-input', 'Attach the recording, in the field "file".', [{ path: 'file', message: 'Attach the recording.' }])
    return { fields, tempPath, ...await file }
  } catch (error) {
    request.unpipe(parser)
    parser.destroy()
    await file?.catch(() => undefined)
    await rm(tempPath, { force: true })
    throw error
  } finally {
    discardRest(request)
  }
}

function openParser(request: IncomingMessage): busboy.Busboy {
  try {
    // 16 kB hold the longest note in any script; busboy calls the limit when it is reached, not passed.
    return busboy({ headers: request.headers, limits: { files: 2, fields: 20, parts: 24, fieldSize: 16 * 1024, fieldNameSize: 60, fileSize: MAX_UPLOAD_BYTES + 1 } })
  } catch {
    throw new DomainError('wrong-media-type', 'Send the recording as multipart/form-data.')
  }
}

async function writeCounted(stream: Readable, tempPath: string) {
  const hash = createHash('sha256')
  let byteCount = 0
  const count = new Transform({
    transform(chunk: Buffer, _encoding, done) {
      byteCount += chunk.length
      hash.update(chunk)
      done(null, chunk)
    },
  })
  stream.once('limit', () => stream.destroy(tooLarge()))
  await pipeline(stream, count, createWriteStream(tempPath, { mode: 0o600 }))
  return { byteCount, sha256: hash.digest('hex') }
}

/** After a refusal the client is still sending; unless what is left is read away, it sees a broken line and never the answer. */
function discardRest(request: IncomingMessage): void {
  if (request.complete || request.destroyed) return
  request.resume()
  setTimeout(() => {
    if (!request.complete) request.socket.destroy()
  }, 30_000).unref()
}
