import argon2 from 'argon2'

/** argon2id with OWASP's minimum for servers (19 MiB, 2 passes, 1 lane). */
const HASHING = { type: argon2.argon2id, memoryCost: 19_456, timeCost: 2, parallelism: 1 } as const

export const hashArgon2id = (password: string) => argon2.hash(password, HASHING)
