/** A letter: paragraphs, at most one link to follow, rows of figures. The text and HTML forms say the same. */
export interface MailContent {
  to: string
  subject: string
  greeting: string
  paragraphs: string[]
  action?: { label: string, url: string }
  rows?: { label: string, value: string }[]
  closing?: string
}

const escape = (text: string) => text.replace(/[&<>"']/g, character => `&#${character.charCodeAt(0)};`)

export function layOut(mail: MailContent): { text: string, html: string } {
  const rows = mail.rows ?? []
  const text = [
    mail.greeting,
    ...mail.paragraphs,
    ...(rows.length ? [rows.map(row => `${row.label}: ${row.value}`).join('\n')] : []),
    ...(mail.action ? [`${mail.action.label}:\n${mail.action.url}`] : []),
    mail.closing ?? 'Rimwright',
  ].join('\n\n')
  const paragraph = (content: string) => `<p style="margin:0 0 16px;line-height:1.5">${content}</p>`
  const html = `<!doctype html><html lang="en"><body style="margin:0;background:#F2F5F2;color:#15211D;font:16px/1.5 sans-serif">
<div style="max-width:560px;margin:0 auto;padding:32px 24px">
<p style="margin:0 0 24px;padding-bottom:8px;border-bottom:1px solid #15211D;font-weight:600;font-size:20px">Rimwright</p>
${paragraph(escape(mail.greeting))}
${mail.paragraphs.map(line => paragraph(escape(line))).join('\n')}
${rows.length ? `<table style="width:100%;border-collapse:collapse;margin:0 0 16px">${rows.map(row => `<tr><td style="padding:6px 0;border-bottom:1px solid #C6CFC9">${escape(row.label)}</td><td style="padding:6px 0;border-bottom:1px solid #C6CFC9;text-align:right;font-family:monospace">${escape(row.value)}</td></tr>`).join('')}</table>` : ''}
${mail.action ? paragraph(`<a href="${escape(mail.action.url)}" style="display:inline-block;padding:12px 16px;background:#14563F;color:#fff;text-decoration:none">${escape(mail.action.label)}</a>`) + paragraph(`<span style="font-size:14px;color:#5C6A64">Or open ${escape(mail.action.url)}</span>`) : ''}
${paragraph(escape(mail.closing ?? 'Rimwright'))}
</div></body></html>`
  return { text, html }
}
