import nodemailer, { type Transporter } from 'nodemailer'
import { getConfig } from '../core/config'
import { useDb } from '../core/db'
import type { Jobs, MailKind } from '../core/jobs'
import { accountMail } from './accountMails'
import { layOut, type MailContent } from './layout'
import { orderReceipt } from './orderMails'

/** Writes each kind of mail from the database at the moment of sending; null when there is nothing to say any more. */
const writers: Record<MailKind, (id: string) => Promise<MailContent | null>> = {
  'confirm-email': id => accountMail('confirm-email', id),
  'reset-password': id => accountMail('reset-password', id),
  'invitation': id => accountMail('invitation', id),
  'order-receipt': id => orderReceipt(useDb(), id),
}

let transport: Transporter | undefined

function useTransport(): Transporter {
  const url = new URL(getConfig().smtpUrl)
  // A mail service on this machine offers no TLS; anywhere else the connection must be secured before a letter goes out.
  const local = url.hostname === '127.0.0.1'
  return transport ??= nodemailer.createTransport({
    host: url.hostname, port: Number(url.port || 587), secure: url.protocol === 'smtps:', ignoreTLS: local, requireTLS: !local && url.protocol === 'smtp:',
    ...(url.username && { auth: { user: decodeURIComponent(url.username), pass: decodeURIComponent(url.password) } }),
    connectionTimeout: 10_000, socketTimeout: 20_000,
  })
}

/** @throws when the mail service refuses or cannot be reached; the queue then tries again */
export async function deliverMail(job: Jobs['mail']): Promise<void> {
  const content = await writers[job.kind](job.id)
  if (!content) return
  await useTransport().sendMail({ from: getConfig().mailFrom, to: content.to, subject: content.subject, ...layOut(content) })
}
