import ts from 'typescript'
import { describe, expect, it } from 'vitest'
import { sources, type SourceFile } from './files'

interface Exported { at: string, doc: string, fileDoc: string, numeric: boolean, named: boolean }

/** Numbers, or arrays of them, that cross the function's border bare: those need their unit in words or in the name. */
const UNIT_IN_NAME = /(Hz|Db|NPerM|KgM[23]|PerS|Pa|Rad|Cents|[a-z]S|[a-z]M|[a-z]C|Um|Mm)$/
const NUMERIC = /\bnumber\b|Float(32|64)Array/

function exportedFunctions({ path, text }: SourceFile): Exported[] {
  const file = ts.createSourceFile(path, text, ts.ScriptTarget.ES2022, true)
  const comments = (node: ts.Node) => (ts.getLeadingCommentRanges(text, node.getFullStart()) ?? []).map(range => text.slice(range.pos, range.end)).join('\n')
  const fileDoc = file.statements[0] ? comments(file.statements[0]) : ''
  return file.statements.flatMap((node): Exported[] => {
    const isExported = ts.canHaveModifiers(node) && ts.getModifiers(node)?.some(modifier => modifier.kind === ts.SyntaxKind.ExportKeyword)
    if (!isExported) return []
    const make = (name: string, fn: ts.SignatureDeclaration): Exported => ({
      at: `${path} ${name}`, doc: comments(node).match(/\/\*\*[\s\S]*?\*\//g)?.at(-1) ?? '', fileDoc,
      named: fn.parameters.filter(({ type }) => type && NUMERIC.test(type.getText(file))).every(({ name: parameter }) => UNIT_IN_NAME.test(parameter.getText(file))),
      numeric: [...fn.parameters.map(parameter => parameter.type), fn.type].some(type => type !== undefined && NUMERIC.test(type.getText(file))),
    })
    if (ts.isFunctionDeclaration(node) && node.name) return [make(node.name.text, node)]
    if (!ts.isVariableStatement(node)) return []
    return node.declarationList.declarations.flatMap((declaration) => {
      const fn = declaration.initializer
      return fn && (ts.isArrowFunction(fn) || ts.isFunctionExpression(fn)) ? [make(declaration.name.getText(file), fn)] : []
    })
  })
}

const core = sources(['shared/acoustics'], /\.ts$/).flatMap(exportedFunctions)
const analysis = sources(['server/utils/analysis'], /\.ts$/).flatMap(exportedFunctions)

const UNIT = /\b(Hz|kHz|m|mm|m2|m3|s|ms|kg|kg\/m3|kg\/m2|N\/m|N|Pa|MPa|dB|cents?|semitones?|rad|radians|samples?|bins?|degC|turns?|m\/s|percent|units?)\b|\u00B0C|%|dimensionless|pure number|no unit|without unit|unitless|SI\b|\bcounts?\b|\bindex|\bshare\b|\bratio\b|\bfactors?\b|\bweights?\b|probability|between 0 and 1|0 to 1/i

describe('every exported function of the numerical core', () => {
  it('is found', () => {
    expect(core.length).toBeGreaterThan(25)
    expect(analysis.length).toBeGreaterThan(25)
  })

  it('says in a docstring what it computes', () => {
    // 15 characters without blanks hold a formula or a plain clause; a bare tag or a repeated name is shorter.
    expect([...core, ...analysis].filter(({ doc }) => doc.replace(/[\s*/]/g, '').length < 15).map(({ at, doc }) => `${at}: ${doc}`)).toEqual([])
  })

  it('states the units of the bare numbers that it takes and gives', () => {
    expect([...core, ...analysis].filter(({ numeric, named, doc }) => numeric && !UNIT.test(doc) && !named).map(({ at }) => at)).toEqual([])
  })

  it('names the source of its formula, in the core, at the function or at the head of its file', () => {
    const SOURCE = /\bSources?\b|\bAbramowitz\b|\bDLMF\b|\bISO \d+|\bphysics\b|\bderiv/i
    expect(core.filter(({ numeric, doc, fileDoc }) => numeric && !SOURCE.test(doc) && !SOURCE.test(fileDoc)).map(({ at }) => at)).toEqual([])
  })
})
