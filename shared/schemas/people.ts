import { z } from 'zod'
import { emailSchema, limitSchema, nameSchema, passwordSchema, roleSchema } from './common'

export const signInBody = z.object({ email: emailSchema, password: z.string().min(1, 'Write your password.').max(200) })

export const signUpBody = z.object({ name: nameSchema, email: emailSchema, password: passwordSchema })

/** 43 characters: 32 random bytes in base64url. */
export const tokenSchema = z.string().trim().length(43, 'This link is incomplete: open it from the e-mail again.')

export const confirmEmailBody = z.object({ token: tokenSchema })
export const forgotPasswordBody = z.object({ email: emailSchema })
export const resetPasswordBody = z.object({ token: tokenSchema, password: passwordSchema })
export const changePasswordBody = z.object({ current: z.string().min(1, 'Write your present password.').max(200), password: passwordSchema })
export const invitationBody = z.object({ name: nameSchema, email: emailSchema, role: roleSchema })

export const userSchema = z.object({ id: z.string(), name: z.string(), email: z.string(), role: roleSchema })
export type SignedInUser = z.infer<typeof userSchema>

export const peopleQuery = z.object({
  limit: limitSchema.default(50),
  cursor: z.string().max(400).optional(),
  q: z.string().trim().max(100).optional(),
  role: roleSchema.optional(),
  active: z.enum(['true', 'false']).transform(text => text === 'true').optional(),
})
export type PeopleQuery = z.infer<typeof peopleQuery>

export const personPatchBody = z.object({ role: roleSchema.optional(), active: z.boolean().optional() })
  .refine(patch => patch.role !== undefined || patch.active !== undefined, 'Say what to change: role or active.')
export type PersonPatchBody = z.infer<typeof personPatchBody>

export interface PersonView {
  id: string
  name: string
  email: string
  role: z.infer<typeof roleSchema>
  /** invited: has not chosen a password yet; unconfirmed: has not opened the letter; closed: deactivated. */
  state: 'active' | 'invited' | 'unconfirmed' | 'closed'
  instruments: number
  createdAt: string
  lastSeenAt: string | null
}
export interface PeoplePage { items: PersonView[], total: number, next: string | null }
