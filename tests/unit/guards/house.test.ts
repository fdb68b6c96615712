import { describe, expect, it } from 'vitest'
import { sources } from './files'

const code = sources(['app', 'server', 'shared', 'db', 'local', 'scripts'], /\.(ts|vue|mjs)$/)
const tests = sources(['tests'], /\.ts$/)
const hits = (files: typeof code, pattern: RegExp) => files.flatMap(({ path, text }) =>
  text.split('\n').flatMap((line, index) => pattern.test(line) ? [`${path}:${index + 1} ${line.trim()}`] : []))

describe('the house', () => {
  it('has no file so long that a stranger finds no room in it', () => {
    // 300 lines: past that a reader loses the thread (a rule of this house; DEVELOPERS.md).
    expect(code.map(({ path, text }) => ({ path, lines: text.split('\n').length - 1 })).filter(({ lines }) => lines > 300)).toEqual([])
  })

  it('carries no left-over marks and no silenced checks', () => {
    const marks = new RegExp(['TO' + 'DO', 'FIX' + 'ME', 'X' + 'XX', '@ts-' + 'ignore', '@ts-' + 'nocheck', '\\bas ' + 'any\\b', 'eslint-' + 'disable'].join('|'))
    expect(hits([...code, ...tests], marks)).toEqual([])
  })

  it('logs through its log alone where the app runs', () => {
    expect(hits(code.filter(({ path }) => /^(app|server|shared)\//.test(path)), /\bconsole\.\w+\(/)).toEqual([])
  })

  it('skips no test and singles none out', () => {
    expect(hits(tests, /\b(it|test|describe)\.(skip|only|todo|fixme)\b/)).toEqual([])
  })

  it('keeps no state in modules that also run on the server', () => {
    // A `let`, ref or store at the top of a shared module would be one for all visitors while the server renders.
    const pages = code.filter(({ path }) => /^app\/(composables|stores|utils)\//.test(path))
    expect(hits(pages, /^(export )?(let|var) |^(export )?const \w+ = (ref|reactive|shallowRef|new Map|new Set)\(\)/)).toEqual([])
  })

  it('speaks plainly: no exclamation marks and no made-up cheer in what people read', () => {
    const templates = code.filter(({ path }) => path.endsWith('.vue')).map(({ path, text }) => ({ path, text: text.slice(text.indexOf('<template>')).replace(/<style[\s\S]*$/, '').replace(/<!--[\s\S]*?-->/g, '') }))
    expect(hits(templates, /\boops\b|\bwoo?hoo\b|^\s*[A-Z][^<>{}"=]*!\s*$|>[^<>{}"]*\w!\s*</i)).toEqual([])
  })

  it('builds its pages without gradients of mood, shadows or round cards', () => {
    const styles = sources(['app'], /\.(vue|css)$/)
    expect(hits(styles, /box-shadow:(?! (inset|none))|\bshadow-(sm|md|lg|xl)\b|\brounded-(full|lg|xl|2xl|3xl)\b|drop-shadow/)).toEqual([])
  })
})
