import { randomBytes } from 'node:crypto'
import argon2 from 'argon2'

/** argon2id with OWASP's minimum for servers (19 MiB, 2 passes, 1 lane). */
const HASHING = { type: argon2.argon2id, memoryCost: 19_456, timeCost: 2, parallelism: 1 } as const

export const hashArgon2id = (password: string) => argon2.hash(password, HASHING)

let decoy: Promise<string> | undefined

/** Takes as long without a hash (no such person, no password yet) as with one. */
export async function isPassword(password: string, hash: string | null | undefined): Promise<boolean> {
  const stand = await (decoy ??= hashArgon2id(randomBytes(16).toString('hex')))
  return await argon2.verify(hash ?? stand, password) && Boolean(hash)
}
