import { randomUUID } from 'node:crypto'
import { simpleParser } from 'mailparser'
import { readJson, writeWhole } from '../files'

export interface Mail {
  id: string
  /** Addresses that the mail was sent to, separated by commas. */
  to: string
  from: string
  subject: string
  text: string
  html: string | null
  at: string
}

const MAX_MAILS = 500

/** The last mails received, newest first, in one JSON file that is replaced as a whole. */
export class Inbox {
  private mails: Mail[]
  private saving: Promise<void> = Promise.resolve()

  constructor(private readonly file?: string) {
    this.mails = (file ? readJson(file) as Mail[] | undefined : undefined) ?? []
  }

  list(): Mail[] {
    return this.mails
  }

  /** Takes a mail as it came over SMTP. */
  async add(raw: Buffer, recipients: string[]): Promise<void> {
    const parsed = await simpleParser(raw, { skipTextToHtml: true, skipImageLinks: true })
    this.mails = [{
      id: randomUUID(),
      to: recipients.join(', '),
      from: parsed.from?.text ?? '',
      subject: parsed.subject ?? '',
      text: parsed.text ?? '',
      html: parsed.html || null,
      at: new Date().toISOString(),
    }, ...this.mails].slice(0, MAX_MAILS)
    await this.save()
  }

  async clear(): Promise<void> {
    this.mails = []
    await this.save()
  }

  /** One write after the other; each writes what is in memory then. */
  save(): Promise<void> {
    const { file } = this
    if (!file) return Promise.resolve()
    return this.saving = this.saving.then(() => writeWhole(file, JSON.stringify(this.mails)))
  }
}
