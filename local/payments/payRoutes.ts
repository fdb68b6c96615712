import type { Actions } from './actions'
import { ApiError } from './apiError'
import type { Book, BookedSession } from './book'
import { closedPage, payPage, problemPage, secondStepPage, successUrl } from './pages'
import type { Webhooks } from './webhooks'

export type PageAnswer = { status: number, html: string } | { redirect: string }

const DECLINED = 'The card was declined. Nothing was charged. Try again or go back.'

/** The payment page: GET shows it, POST is a button pressed. It needs no script in the browser. */
export async function answerPay(method: string, path: string, query: URLSearchParams, form: Record<string, unknown>, deps: { book: Book, actions: Actions, webhooks: Webhooks }): Promise<PageAnswer> {
  const [, , id = '', step] = path.split('/')
  const booked = deps.book.content.sessions[decodeURIComponent(id)]
  if (!booked) return { status: 404, html: problemPage('No such payment', 'This payment does not exist. Go back to the shop and start again.') }
  if (booked.session.status !== 'open') return { status: 200, html: closedPage(booked) }
  if (method === 'GET') return { status: 200, html: step === 'second-step' ? secondStepPage(booked) : payPage(booked, query.has('declined') ? DECLINED : undefined) }
  try {
    return await press(String(form.action), booked, deps)
  } catch (error) {
    if (error instanceof ApiError) return { status: 409, html: problemPage('This did not work', error.message) }
    throw error
  }
}

async function press(action: string, booked: BookedSession, { book, actions, webhooks }: { book: Book, actions: Actions, webhooks: Webhooks }): Promise<PageAnswer> {
  const here = `/pay/${booked.session.id}`
  const send = async (event: string) => {
    await book.save()
    // The real page waits up to 10 s for the first try too, so that the shop knows before its customer returns.
    await webhooks.send(event)
  }
  switch (action) {
    case 'pay':
    case 'confirm':
      await send(actions.pay(booked))
      return { redirect: successUrl(booked.session) }
    case 'later':
      await send(actions.payLater(booked))
      return { redirect: successUrl(booked.session) }
    case 'decline':
    case 'refuse':
      await send(actions.decline(booked))
      return { redirect: `${here}?declined` }
    case 'second-step':
      return { redirect: `${here}/second-step` }
    default:
      return { status: 400, html: problemPage('Unknown button', 'Go back and press one of the buttons of the page.') }
  }
}
