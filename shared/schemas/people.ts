import { z } from 'zod'
import { emailSchema, nameSchema, passwordSchema, roleSchema } from './common'

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
