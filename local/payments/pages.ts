import type Stripe from 'stripe'
import type { BookContent, BookedSession } from './book'

const STYLE = `
  :root { color-scheme: light dark; font: 16px/1.5 system-ui, sans-serif }
  body { margin: 0 auto; padding: 1.5rem; max-width: 34rem }
  main.wide { max-width: none } body:has(main.wide) { max-width: 70rem }
  .notice { border: 1px dashed; padding: .5rem .75rem; margin-bottom: 1.5rem }
  .problem { border-left: 4px solid; padding: .25rem .75rem; font-weight: 600 }
  table { border-collapse: collapse; width: 100% } th, td { text-align: left; padding: .35rem .5rem; border-bottom: 1px solid #8886; vertical-align: top }
  td.amount, th.amount { text-align: right; white-space: nowrap }
  form { margin: 0 } .ways { display: grid; gap: .5rem; margin-top: 1.5rem } .inline { display: inline-block }
  button { font: inherit; padding: .6rem .9rem; width: 100%; cursor: pointer } .inline button { width: auto; padding: .15rem .5rem }
  code { font-size: .85em; overflow-wrap: anywhere }`

/** The page where a session is paid, by buttons for each way that it can go. */
export function payPage(booked: BookedSession, problem?: string): string {
  const { session } = booked
  const way = (action: string, label: string) => `<form method="post"><button name="action" value="${action}">${label}</button></form>`
  return layout('Pay', `
    <h1>Pay ${money(session.amount_total, session.currency)}</h1>
    ${problem ? `<p class="problem" role="alert">${escape(problem)}</p>` : ''}
    ${itemTable(booked)}
    ${session.customer_email ? `<p>For ${escape(session.customer_email)}</p>` : ''}
    <div class="ways">
      ${way('pay', `Pay ${money(session.amount_total, session.currency)}`)}
      ${way('second-step', 'Pay, and have the bank ask for a second step')}
      ${way('later', 'Pay by bank transfer: the money arrives later')}
      ${way('decline', 'Have the card declined')}
    </div>
    ${session.cancel_url ? `<p><a href="${escape(session.cancel_url)}">Go back without paying</a></p>` : ''}`)
}

/** The second step that a bank may ask for. */
export function secondStepPage({ session }: BookedSession): string {
  return layout('Second step', `
    <h1>Second step</h1>
    <p>The bank asks whether it is you who pays ${money(session.amount_total, session.currency)}.</p>
    <div class="ways">
      <form method="post" action="/pay/${escape(session.id)}"><button name="action" value="confirm">Confirm</button></form>
      <form method="post" action="/pay/${escape(session.id)}"><button name="action" value="refuse">Refuse</button></form>
    </div>`)
}

/** What a session that is no longer open shows. */
export function closedPage({ session }: BookedSession): string {
  const words = session.status === 'expired' ? 'This payment page has expired. Nothing was charged.' : 'This payment has been made.'
  const back = session.status === 'expired' ? session.cancel_url : successUrl(session)
  return layout('Payment closed', `<h1>${words}</h1>${back ? `<p><a href="${escape(back)}">Back to the shop</a></p>` : ''}`)
}

export function problemPage(title: string, message: string): string {
  return layout(title, `<h1>${escape(title)}</h1><p>${escape(message)}</p>`)
}

/** The address that a paid session leads to. Source of the template: docs.stripe.com/payments/checkout/custom-success-page. */
export function successUrl(session: Stripe.Checkout.Session): string {
  return (session.success_url ?? '/').replaceAll('{CHECKOUT_SESSION_ID}', session.id)
}

/** Latest sessions and events, with what a bank or time could do to them. */
export function overviewPage(content: BookContent): string {
  const sessions = Object.values(content.sessions).slice(-50).reverse()
  const events = Object.values(content.events).slice(-50).reverse()
  const button = (path: string, label: string) => `<form class="inline" method="post" action="/stand-in/${path}"><button>${label}</button></form>`
  const buttons = ({ session }: BookedSession) => {
    const of = (...names: [string, string][]) => names.map(([name, label]) => button(`sessions/${escape(session.id)}/${name}`, label)).join(' ')
    if (session.status === 'open') return `<a href="${escape(session.url ?? '')}">Payment page</a> ${of(['expire', 'Expire'])}`
    if (session.payment_status === 'paid') return of(['dispute', 'Dispute'])
    return session.status === 'complete' ? of(['settle', 'Money arrives'], ['fail', 'Bank refuses']) : ''
  }
  return layout('Payments', `
    <h1>Sessions</h1>
    <table><thead><tr><th>Session</th><th>For</th><th class="amount">Amount</th><th>Status</th><th></th></tr></thead><tbody>
    ${sessions.map(booked => `<tr><td><code>${escape(booked.session.id)}</code></td><td>${escape(booked.session.client_reference_id ?? booked.session.customer_email ?? '')}</td>
      <td class="amount">${money(booked.session.amount_total, booked.session.currency)}</td><td>${booked.session.status}, ${booked.session.payment_status}</td><td>${buttons(booked)}</td></tr>`).join('')}
    </tbody></table>
    <h2>Events</h2>
    <table><thead><tr><th>Event</th><th>Type</th><th>Tries</th><th>Last answer</th><th></th></tr></thead><tbody>
    ${events.map(({ event, attempts, delivered, lastAnswer }) => `<tr><td><code>${escape(event.id)}</code></td><td>${escape(event.type)}</td><td>${attempts}</td>
      <td>${escape(lastAnswer ?? '')}${delivered ? '' : ' (not delivered)'}</td><td>${button(`events/${escape(event.id)}/resend`, 'Send again')}</td></tr>`).join('')}
    </tbody></table>`, 'wide')
}

function itemTable({ session, lineItems }: BookedSession): string {
  const row = (label: string, amount: number) => `<tr><td>${escape(label)}</td><td class="amount">${money(amount, session.currency)}</td></tr>`
  return `<table><thead><tr><th>Item</th><th class="amount">Amount</th></tr></thead><tbody>
    ${lineItems.map(item => row(`${item.description ?? ''}${item.quantity === 1 ? '' : ` × ${item.quantity}`}`, item.amount_total)).join('')}
    ${session.shipping_cost ? row('Shipping', session.shipping_cost.amount_total) : ''}
    ${row('Total', session.amount_total ?? 0)}</tbody></table>`
}

function money(minor: number | null, currency: string | null): string {
  if (minor === null || !currency) return ''
  const format = new Intl.NumberFormat('en-GB', { style: 'currency', currency: currency.toUpperCase(), currencyDisplay: 'code' })
  return escape(format.format(minor / 10 ** (format.resolvedOptions().maximumFractionDigits ?? 2)))
}

function layout(title: string, body: string, width = ''): string {
  return `<!doctype html><html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width, initial-scale=1">
<title>${escape(title)} · local payment stand-in</title><link rel="icon" href="data:,"><style>${STYLE}</style></head>
<body><p class="notice">Local payment stand-in: no money moves.</p><main class="${width}">${body}</main></body></html>`
}

function escape(text: string): string {
  return text.replace(/[&<>"']/g, character => `&#${character.charCodeAt(0)};`)
}
