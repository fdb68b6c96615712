import { describe, expect, it } from 'vitest'
import { sources } from './files'

const routes = sources(['server/api'], /\.ts$/)

describe('every route', () => {
  it('is there to be checked', () => {
    expect(routes.length).toBeGreaterThan(20)
  })

  it.each(routes)('$path states who may call it', ({ text }) => {
    expect(text).toMatch(/export default defineRoute\(\{\s*access: ('public'|'signed-in'|\[('(owner|maker|staff|customer)'(, )?)+\]|[a-z]\w+),/)
  })

  it.each(routes)('$path names its method', ({ path }) => {
    // The catch-all answers every method with 404.
    if (path !== 'server/api/[...].ts') expect(path).toMatch(/\.(get|post|patch|put|delete)\.ts$/)
  })

  it.each(routes)('$path stays under 60 lines and holds no SQL', ({ text }) => {
    expect(text.split('\n').length).toBeLessThanOrEqual(60)
    expect(text).not.toMatch(/\bsql`|\.(selectFrom|insertInto|updateTable|deleteFrom|executeQuery)\(/)
  })
})
