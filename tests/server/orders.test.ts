import { beforeAll, describe, expect, it } from 'vitest'
import type { OrdersPage, OrderView } from '../../shared/schemas/order'
import { database, playPayment, sessionIdOf, signInAs, waitForMail } from '../support/stack'
import { address, designHead, orderAndPay, placeOrder, readOrder, type Shopper } from '../support/shop'

describe('ordering a head', () => {
  let customer: Shopper
  let staff: Shopper
  beforeAll(async () => {
    [customer, staff] = await Promise.all([signInAs('customer'), signInAs('staff')])
  })

  it('opens a payment page for the sum of the lines, and waits for payment', async () => {
    const spec = await designHead(customer)
    const placed = await placeOrder(customer, [spec.id])
    expect(placed.status).toBe(201)
    const { order, checkoutUrl } = placed.body
    expect(order).toMatchObject({ status: 'awaiting-payment', currency: 'eur', totalMinor: spec.price!.totalMinor })
    expect(order.number).toMatch(/^RW-\d+$/)
    const page = await (await fetch(checkoutUrl)).text()
    expect(page).toContain('Tuning and proof')
    const seen = await readOrder(customer, order.id)
    expect(seen.lines.reduce((sum, line) => sum + line.amountMinor, 0)).toBe(order.totalMinor)
    expect(seen).toMatchObject({ checkoutUrl, payments: [], refunds: [], paidMinor: 0 })
    expect(seen.history).toMatchObject([{ from: null, to: 'awaiting-payment', by: customer.person.name }])
  })

  it('is paid once the payment page has been, and a receipt arrives by mail with every line', async () => {
    const { id, number, totalMinor } = await orderAndPay(customer)
    const order = await readOrder(customer, id)
    expect(order).toMatchObject({ status: 'paid', paidMinor: totalMinor, checkoutUrl: null, payments: [{ amountMinor: totalMinor, status: 'succeeded' }] })
    expect(order.dueOn).toMatch(/^\d{4}-\d\d-\d\d$/)
    const mail = await waitForMail(customer.person.email, ({ subject }) => subject.includes(number))
    expect(mail.subject).toBe(`Receipt for order ${number}`)
    for (const text of [mail.text, mail.html!]) {
      expect(text).toContain(`€${(totalMinor / 100).toFixed(2)}`)
      expect(text).toContain('Tuning and proof')
      expect(text).toContain(`/orders/${id}`)
    }
  })

  it('charges shipping once for several heads, and VAT on all of it', async () => {
    const [first, second] = [await designHead(customer), await designHead(customer, { filmId: 'pet-2x188' })]
    const { body: { order } } = await placeOrder(customer, [first.id, second.id])
    const { lines, totalMinor } = await readOrder(customer, order.id)
    expect(lines.filter(line => line.kind === 'shipping')).toHaveLength(1)
    const net = lines.filter(line => line.kind !== 'vat').reduce((sum, line) => sum + line.amountMinor, 0)
    // 19 %, halves up: the rule of the price list that a new workshop starts from.
    expect(totalMinor - net).toBe(Math.round(net * 0.19))
    expect(lines.filter(line => line.kind === 'film').map(line => line.label)).toEqual([expect.stringContaining('Head 1: Clear 250'), expect.stringContaining('Head 2: Twin 188')])
  })

  it('refuses a head that cannot be made, and writes no order', async () => {
    const spec = await designHead(customer, { target: { kind: 'pitch', hz: 900 } })
    expect(spec).toMatchObject({ reachable: false, price: null })
    const before = await countOrders(customer)
    const { status, body } = await placeOrder(customer, [spec.id])
    expect(status).toBe(409)
    expect(body).toMatchObject({ message: expect.stringContaining('cannot be made') as string })
    expect(await countOrders(customer)).toBe(before)
  })

  it('refuses a head that stands in an open order, and takes it again once that one is cancelled', async () => {
    const spec = await designHead(customer)
    const { body: { order } } = await placeOrder(customer, [spec.id])
    const again = await placeOrder(customer, [spec.id])
    expect(again.status).toBe(409)
    expect(again.body).toMatchObject({ message: expect.stringContaining(order.number) as string })
    expect((await customer.post(`/api/orders/${order.id}/cancel`)).status).toBe(200)
    expect((await placeOrder(customer, [spec.id])).status).toBe(201)
  })

  it('lets one of two orders win that are placed for the same head in the same moment', async () => {
    const spec = await designHead(customer)
    const answers = await Promise.all([placeOrder(customer, [spec.id]), placeOrder(customer, [spec.id])])
    expect(answers.map(answer => answer.status).sort()).toEqual([201, 409])
  })

  it('hides another customer\'s head: it cannot be ordered, and no order is written', async () => {
    const stranger = await signInAs('customer')
    const spec = await designHead(customer)
    expect((await stranger.get(`/api/head-specs/${spec.id}`)).status).toBe(404)
    expect((await placeOrder(stranger, [spec.id])).status).toBe(404)
    expect(await countOrders(stranger)).toBe(0)
  })

  it('hides another customer\'s order on every route, and changes nothing', async () => {
    const stranger = await signInAs('customer')
    const spec = await designHead(customer)
    const { body: { order } } = await placeOrder(customer, [spec.id])
    expect((await stranger.get(`/api/orders/${order.id}`)).status).toBe(404)
    for (const route of ['cancel', 'settle']) expect((await stranger.post(`/api/orders/${order.id}/${route}`)).status).toBe(404)
    expect((await stranger.get<OrdersPage>('/api/orders')).body.items).toEqual([])
    expect((await readOrder(customer, order.id)).status).toBe('awaiting-payment')
  })

  it('names the entries of an address that are missing', async () => {
    const spec = await designHead(customer)
    const { status, body } = await customer.post<{ data: { issues: { path: string }[] } }>('/api/orders', { headSpecIds: [spec.id], shippingAddress: { ...address, city: ' ', country: 'Germany' } })
    expect(status).toBe(400)
    expect(body.data.issues.map(issue => issue.path).sort()).toEqual(['shippingAddress.city', 'shippingAddress.country'])
  })

  it('refuses a price that has lapsed', async () => {
    const spec = await designHead(customer)
    // 15 days back: one more than the price list lets a quote stand.
    await database().updateTable('head_specs').set({ created_at: new Date(Date.now() - 15 * 24 * 3_600_000) as never }).where('id', '=', spec.id).execute()
    const { status, body } = await placeOrder(customer, [spec.id])
    expect(status).toBe(409)
    expect(body).toMatchObject({ message: expect.stringContaining('lapsed') as string })
  })

  it('prices an order by the list that its head was quoted from, not by the newest', async () => {
    const spec = await designHead(customer)
    const current = await database().selectFrom('price_lists').selectAll().orderBy('valid_from', 'desc').limit(1).executeTakeFirstOrThrow()
    const prices = current.prices as { zones: { countries: string[] }[] }
    const untaxed = { ...prices, mountingMinor: 1, zones: prices.zones.map(zone => ({ ...zone, shippingMinor: 111, vatBasisPoints: 0 })) }
    const old = await database().insertInto('price_lists')
      .values({ valid_from: new Date('2020-01-01T00:00:00Z'), currency: 'eur', prices: JSON.stringify(untaxed), created_by: null }).returning('id').executeTakeFirstOrThrow()
    await database().updateTable('head_specs').set({ price_list_id: old.id }).where('id', '=', spec.id).execute()
    const heads = spec.price!.lines.filter(line => ['film', 'mounting', 'tuning'].includes(line.kind)).reduce((sum, line) => sum + line.amountMinor, 0)
    expect((await placeOrder(customer, [spec.id])).body.order.totalMinor).toBe(heads + 111)
  })

  describe('the list', () => {
    it('gives each order once, newest first, whatever the size of a page', async () => {
      const shopper = await signInAs('customer')
      const ids: string[] = []
      for (let index = 0; index < 5; index++) ids.push((await placeOrder(shopper, [(await designHead(shopper)).id])).body.order.id)
      const seen: string[] = []
      let next: string | null = ''
      while (next !== null) {
        const { body }: { body: OrdersPage } = await shopper.get<OrdersPage>(`/api/orders?limit=2${next && `&cursor=${next}`}`)
        expect(body.total).toBe(5)
        seen.push(...body.items.map(order => order.id))
        next = body.next
      }
      expect(seen).toEqual([...ids].reverse())
    })

    it('lets staff find an order by number, name and status, and says when it is overdue', async () => {
      const { id, number } = await orderAndPay(customer)
      await database().updateTable('orders').set({ due_on: new Date(Date.now() - 3 * 24 * 3_600_000) }).where('id', '=', id).execute()
      for (const query of [`q=${number}`, `q=${number}&status=paid`, `q=${number}&overdue=true`]) {
        const { body } = await staff.get<OrdersPage>(`/api/orders?${query}`)
        expect(body.items).toMatchObject([{ id, overdue: true, customer: { name: customer.person.name }, heads: [expect.stringContaining('Clear 250') as string] }])
      }
      expect((await staff.get<OrdersPage>(`/api/orders?q=${number}&status=tuned`)).body.items).toEqual([])
      expect((await staff.get<OrdersPage>('/api/orders?q=100%25_')).body.items).toEqual([])
      // PostgreSQL refuses NUL in a parameter; a search must not fail on it.
      expect((await staff.get(`/api/orders?q=%00${number}`)).status).toBe(200)
    })

    it('refuses a cursor that it never gave out', async () => {
      expect((await staff.get('/api/orders?cursor=WyJ4IiwieSJd')).status).toBe(400)
    })
  })

  describe('the way through the workshop', () => {
    it('goes from paid to delivered step by step, each with a history entry', async () => {
      const { id } = await orderAndPay(customer)
      for (const to of ['in-making', 'tuned', 'shipped', 'delivered']) expect((await staff.post(`/api/orders/${id}/status`, { to })).status).toBe(200)
      const { status, history } = await readOrder(customer, id)
      expect(status).toBe('delivered')
      expect(history.map(entry => entry.to)).toEqual(['awaiting-payment', 'paid', 'in-making', 'tuned', 'shipped', 'delivered'])
      expect(history.at(-1)).toMatchObject({ from: 'shipped', by: staff.person.name })
    })

    it('refuses to ship what is not tuned, says so, and changes nothing', async () => {
      const { id } = await orderAndPay(customer)
      await staff.post(`/api/orders/${id}/status`, { to: 'in-making' })
      const { status, body } = await staff.post<{ message: string }>(`/api/orders/${id}/status`, { to: 'shipped' })
      expect(status).toBe(409)
      expect(body.message).toContain('Shipped follows tuned')
      const { history, status: now } = await readOrder(customer, id)
      expect(now).toBe('in-making')
      expect(history.at(-1)!.to).toBe('in-making')
    })

    it('lets nobody call an unpaid order paid', async () => {
      const spec = await designHead(customer)
      const { body: { order } } = await placeOrder(customer, [spec.id])
      expect((await staff.post(`/api/orders/${order.id}/status`, { to: 'paid' })).status).toBe(409)
      expect((await staff.post(`/api/orders/${order.id}/status`, { to: 'in-making' })).status).toBe(409)
      expect((await customer.post(`/api/orders/${order.id}/status`, { to: 'paid' })).status).toBe(403)
      expect((await readOrder(customer, order.id)).status).toBe('awaiting-payment')
    })
  })

  it('cannot be paid after it was cancelled: the payment page is closed with it', async () => {
    const spec = await designHead(customer)
    const { body: { order, checkoutUrl } } = await placeOrder(customer, [spec.id])
    expect((await customer.post<OrderView>(`/api/orders/${order.id}/cancel`)).body).toMatchObject({ status: 'cancelled', checkoutUrl: null })
    expect((await playPayment(sessionIdOf(checkoutUrl), 'pay')).status).toBe(400)
  })
})

async function countOrders(shopper: Shopper): Promise<number> {
  return (await shopper.get<OrdersPage>('/api/orders')).body.total
}
