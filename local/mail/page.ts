import type { Mail } from './inbox'

const STYLE = `
  :root { color-scheme: light dark; font: 16px/1.5 system-ui, sans-serif }
  body { margin: 0 auto; padding: 1.5rem; max-width: 50rem }
  .notice { border: 1px dashed; padding: .5rem .75rem }
  details { border-bottom: 1px solid #8886; padding: .5rem 0 } summary { cursor: pointer }
  pre { white-space: pre-wrap; overflow-wrap: anywhere } iframe { width: 100%; height: 30rem; border: 1px solid #8886; background: #fff }`

/** All mails received, each to open in place. Works without scripts. */
export function inboxPage(mails: Mail[]): string {
  const list = mails.map(mail => `<details><summary><strong>${escape(mail.subject)}</strong> to ${escape(mail.to)}, ${escape(mail.at)}</summary>
    <pre>${escape(mail.text)}</pre>${mail.html ? `<iframe sandbox title="As HTML" srcdoc="${escape(mail.html)}"></iframe>` : ''}</details>`).join('')
  return `<!doctype html><html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width, initial-scale=1">
<title>Mail · local mail stand-in</title><link rel="icon" href="data:,"><style>${STYLE}</style></head>
<body><p class="notice">Local mail stand-in: nothing is sent on.</p><h1>Mail received</h1>${list || '<p>No mail yet.</p>'}</body></html>`
}

function escape(text: string): string {
  return text.replace(/[&<>"']/g, character => `&#${character.charCodeAt(0)};`)
}
