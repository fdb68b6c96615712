export type { Role } from '../schemas/common'
export type { SignedInUser } from '../schemas/people'
