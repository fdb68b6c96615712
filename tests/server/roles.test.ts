import { readdirSync } from 'node:fs'
import { randomUUID } from 'node:crypto'
import { fileURLToPath } from 'node:url'
import { beforeAll, describe, expect, it } from 'vitest'
import type { Role } from '../../db/people.table'
import { Client, signInAs } from '../support/stack'

const ROLES = ['customer', 'staff', 'maker', 'owner'] as const
const workshop: Role[] = ['owner', 'maker', 'staff']
const bench: Role[] = ['owner', 'maker', 'customer']
const shop: Role[] = ['owner', 'staff']

interface Rule {
  /** Who gets past the door, as product.md says; own things only for customers is tested in ownership.test.ts. */
  may: 'public' | 'signed-in' | Role[]
  /** What someone who may is answered for an unknown id and an empty body: shows that the request went past the door. */
  answers: number
}

/** Every route by its file. A route that is missing here fails the first test. */
const table: Record<string, Rule> = {
  '[...]': { may: 'public', answers: 404 },
  'auth/change-password.post': { may: 'signed-in', answers: 400 },
  'auth/confirm-email.post': { may: 'public', answers: 400 },
  'auth/confirmation.post': { may: 'public', answers: 400 },
  'auth/forgot-password.post': { may: 'public', answers: 400 },
  'auth/reset-password.post': { may: 'public', answers: 400 },
  'auth/sign-in.post': { may: 'public', answers: 400 },
  'auth/sign-out-everywhere.post': { may: 'signed-in', answers: 200 },
  'auth/sign-out.post': { may: 'public', answers: 200 },
  'auth/sign-up.post': { may: 'public', answers: 400 },
  'both-heads/[id].get': { may: 'signed-in', answers: 404 },
  'both-heads/index.post': { may: bench, answers: 400 },
  'films/index.get': { may: 'public', answers: 200 },
  'head-specs/[id].get': { may: 'signed-in', answers: 404 },
  'head-specs/index.post': { may: 'signed-in', answers: 400 },
  'head-specs/quote.get': { may: 'public', answers: 400 },
  'heads/[headId].patch': { may: bench, answers: 400 },
  'heads/[headId]/calibration.delete': { may: ['owner', 'maker'], answers: 404 },
  'heads/[headId]/calibration.post': { may: ['owner', 'maker'], answers: 400 },
  'heads/[headId]/recordings.post': { may: bench, answers: 404 },
  'health.get': { may: 'public', answers: 200 },
  'instruments/[id].get': { may: 'signed-in', answers: 404 },
  'instruments/[id].patch': { may: bench, answers: 404 },
  'instruments/[id]/both-heads.get': { may: 'signed-in', answers: 404 },
  'instruments/[id]/duplicate.post': { may: bench, answers: 404 },
  'instruments/[id]/history.get': { may: 'signed-in', answers: 404 },
  'instruments/index.get': { may: 'signed-in', answers: 200 },
  'instruments/index.post': { may: bench, answers: 400 },
  'orders/[id]/attention.delete': { may: shop, answers: 404 },
  'orders/[id]/cancel.post': { may: 'signed-in', answers: 404 },
  'orders/[id]/index.get': { may: 'signed-in', answers: 404 },
  'orders/[id]/refunds.post': { may: shop, answers: 400 },
  'orders/[id]/settle.post': { may: 'signed-in', answers: 404 },
  'orders/[id]/status.post': { may: workshop, answers: 400 },
  'orders/index.get': { may: 'signed-in', answers: 200 },
  'orders/index.post': { may: ['customer'], answers: 400 },
  'people/[id].patch': { may: ['owner'], answers: 400 },
  'people/[id]/invitation.post': { may: workshop, answers: 404 },
  'people/index.get': { may: workshop, answers: 200 },
  'people/invitations.post': { may: workshop, answers: 400 },
  'readings/[id].get': { may: 'signed-in', answers: 404 },
  'readings/export.get': { may: workshop, answers: 200 },
  'readings/index.get': { may: 'signed-in', answers: 200 },
  'readings/makers.get': { may: workshop, answers: 200 },
  'recordings/[id].delete': { may: ['owner', 'maker'], answers: 404 },
  'recordings/[id]/audio.get': { may: 'signed-in', answers: 404 },
  'recordings/[id]/read-again.post': { may: bench, answers: 404 },
  'rereading/[id]/cancel.post': { may: ['owner', 'maker'], answers: 404 },
  'rereading/index.get': { may: workshop, answers: 200 },
  'rereading/index.post': { may: ['owner', 'maker'], answers: 400 },
  'showcase/audio.get': { may: 'public', answers: 404 },
  'showcase/index.get': { may: 'public', answers: 200 },
  'turn-sheets/[id].get': { may: 'signed-in', answers: 404 },
  'turn-sheets/[id]/applied.post': { may: bench, answers: 400 },
  'turn-sheets/index.post': { may: ['owner', 'maker'], answers: 400 },
  'webhooks/stripe.post': { may: 'public', answers: 400 },
}

/** 'orders/[id]/index.get' as a request. */
function requestOf(route: string): { method: string, path: string } {
  const [, name = route, method = 'get'] = /^(.*?)(?:\.(get|post|patch|put|delete))?$/.exec(route) ?? []
  const path = name.replace(/\/index$/, '').replace('[...]', 'nothing-here').replace(/\[\w+\]/g, () => randomUUID())
  return { method: method.toUpperCase(), path: `/api/${path}` }
}

async function visit(route: string, client: Client): Promise<number> {
  const { method, path } = requestOf(route)
  return (await client.send(method, path, method === 'GET' || method === 'DELETE' ? undefined : {})).status
}

let clients: Record<Role, Client>
beforeAll(async () => {
  clients = { customer: await signInAs('customer'), staff: await signInAs('staff'), maker: await signInAs('maker'), owner: await signInAs('owner') }
})

describe('the role table', () => {
  it('names every route that there is, and no other', () => {
    const folder = fileURLToPath(new URL('../../server/api', import.meta.url))
    const files = readdirSync(folder, { recursive: true, encoding: 'utf8' }).filter(file => file.endsWith('.ts')).map(file => file.replace(/\.ts$/, '').replaceAll('\\', '/'))
    expect(Object.keys(table).toSorted()).toEqual(files.toSorted())
  })

  describe.each(Object.entries(table))('%s', (route, { may, answers }) => {
    it(may === 'public' ? 'answers nobody in particular' : 'turns nobody away with 401', async () => {
      expect(await visit(route, new Client())).toBe(may === 'public' ? answers : 401)
    })

    // Routes that end the session are visited with a session of their own.
    const client = async (role: Role) => route.startsWith('auth/sign-out') ? signInAs(role) : clients[role]
    it.each(ROLES)(`answers ${answers} or 403 to %s as the table says`, async (role) => {
      const allowed = may === 'public' || may === 'signed-in' || may.includes(role)
      expect(await visit(route, await client(role))).toBe(allowed ? answers : 403)
    })
  })
})
