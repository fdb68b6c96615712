import { describe, expect, it } from 'vitest'
import { Client } from '../support/stack'

describe('the server', () => {
  it('says that it is well when the database answers', async () => {
    const { status, body } = await new Client().get('/api/health')
    expect(status).toBe(200)
    expect(body).toEqual({ status: 'ok' })
  })

  it('answers an address that no route serves with 404 in the shape of every error', async () => {
    const { status, body, headers } = await new Client().get('/api/no/such/route')
    expect(status).toBe(404)
    expect(headers.get('content-type')).toMatch(/^application\/json/)
    expect(body).toEqual({ statusCode: 404, statusMessage: 'Not Found', message: expect.stringContaining('was not found') })
  })

  it.each([
    ['not JSON', '{', 'application/json', 400],
    ['another type', 'email=a', 'application/x-www-form-urlencoded', 415],
    ['an array', '[]', 'application/json', 400],
    ['nothing', '', 'application/json', 400],
    ['a megabyte', JSON.stringify({ email: 'a'.repeat(1_000_000) }), 'application/json', 413],
  ])('refuses a body that is %s in plain words, without a trace of its code', async (_what, body, type, expected) => {
    const answer = await new Client().send<{ message: string }>('POST', '/api/auth/sign-in', body, { 'content-type': type })
    expect(answer.status).toBe(expected)
    expect(answer.body.message).toMatch(/^[A-Z].*[.)]$/)
    expect(JSON.stringify(answer.body)).not.toMatch(/\bat \w|node_modules|server\/|Zod|Invalid input|undefined/)
  })

  it('sends its pages with a content security policy, no sniffing and no framing', async () => {
    const { headers } = await new Client().get('/sign-in')
    expect(headers.get('content-security-policy')).toMatch(/script-src[^;]*'nonce-/)
    expect(headers.get('x-content-type-options')).toBe('nosniff')
    expect(headers.get('x-frame-options')).toBe('SAMEORIGIN')
  })
})
