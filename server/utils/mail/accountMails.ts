import { getConfig } from '../core/config'
import { useDb } from '../core/db'
import { issueToken } from '../people/tokens'
import type { MailContent } from './layout'

const letters = {
  'confirm-email': {
    subject: 'Confirm your e-mail address', path: '/confirm-email', label: 'Confirm this address',
    paragraphs: ['Someone, we hope you, opened a Rimwright account with this address. Confirm it to sign in.', 'The link holds for two days. If it was not you, do nothing: without confirmation the account stays shut.'],
  },
  'reset-password': {
    subject: 'Choose a new password', path: '/reset-password', label: 'Choose a new password',
    paragraphs: ['You asked for a new password. Your old one stays good until you choose another.', 'The link holds for one hour and works once. If you did not ask, do nothing.'],
  },
  'invitation': {
    subject: 'You are invited to Rimwright', path: '/reset-password', label: 'Choose a password and come in',
    paragraphs: ['The workshop has opened a Rimwright account for you.', 'The link holds for seven days and works once.'],
  },
} as const

/** The token is made here, when the letter is written: it stands nowhere else in the clear. */
export async function accountMail(kind: keyof typeof letters, userId: string): Promise<MailContent | null> {
  const user = await useDb().selectFrom('users').select(['name', 'email', 'role', 'deactivated_at', 'email_confirmed_at']).where('id', '=', userId).executeTakeFirst()
  if (!user || user.deactivated_at) return null
  if (kind === 'confirm-email' && user.email_confirmed_at) return null
  const letter = letters[kind]
  const more = kind === 'invitation' && user.role === 'customer' ? ['With it you see the tuning histories of your instruments, send taps from home, and order heads made to a pitch.'] : []
  const token = await issueToken(userId, kind)
  return {
    to: user.email, subject: letter.subject, greeting: `Dear ${user.name},`, paragraphs: [...letter.paragraphs.slice(0, 1), ...more, ...letter.paragraphs.slice(1)],
    action: { label: letter.label, url: `${getConfig().publicUrl}${letter.path}?token=${token}` },
  }
}
