import { dirname, join, normalize, sep } from 'node:path'
import { describe, expect, it } from 'vitest'
import { sources, type SourceFile } from './files'

const files = sources(['app', 'server', 'shared', 'db'], /\.(ts|vue)$/)
const aliases: [RegExp, string][] = [[/^#shared\//, 'shared/'], [/^(~~|@@)\//, ''], [/^[~@]\//, 'app/']]

/** What a file imports: paths from the project's root, or the names of packages. Types count too. */
function importsOf({ path, text }: SourceFile): string[] {
  const specifiers = [...text.matchAll(/(?:^|\n)\s*(?:import|export)\b[^'"`;]*?\bfrom\s*['"]([^'"]+)['"]|\bimport\(\s*['"]([^'"]+)['"]|(?:^|\n)\s*import\s+['"]([^'"]+)['"]/g)]
    .map(match => match[1] ?? match[2] ?? match[3]!)
  return specifiers.map((specifier) => {
    if (specifier.startsWith('.')) return normalize(join(dirname(path), specifier)).split(sep).join('/')
    const alias = aliases.find(([pattern]) => pattern.test(specifier))
    return alias ? specifier.replace(alias[0], alias[1]) : `package:${specifier}`
  })
}

/** Who may import from whom inside the project. Packages are free, but for shared/acoustics, which stands alone. */
const arrows: { from: RegExp, may: RegExp }[] = [
  { from: /^shared\/acoustics\//, may: /^shared\/acoustics\// },
  { from: /^shared\//, may: /^shared\/|^package:(?!vue|nuxt|#|h3|kysely|pg$)/ },
  { from: /^app\//, may: /^(app|shared)\/|^package:/ },
  { from: /^server\/api\//, may: /^(server|shared)\/|^package:(?!kysely|pg$|stripe|nodemailer)/ },
  { from: /^server\//, may: /^(server|shared|db)\/|^package:/ },
  { from: /^db\/seed\//, may: /^(db|shared|server\/utils)\/|^package:|^tests\/support\/drum/ },
  { from: /^db\//, may: /^(db|shared)\/|^package:/ },
]

describe('the arrows between the parts of the house', () => {
  it('finds imports at all', () => {
    expect(files.flatMap(importsOf).length).toBeGreaterThan(300)
    expect(importsOf({ path: 'app/a/b.ts', text: 'import {\n  x,\n} from \'../../server/y\'\nexport * from "#shared/z"\nimport \'vue\'' })).toEqual(['server/y', 'shared/z', 'package:vue'])
  })

  it('reach shared/ from the app by its alias: the build leaves a relative path unresolved', () => {
    expect(files.filter(({ path, text }) => path.startsWith('app/') && /from '(\.\.\/)+shared\//.test(text)).map(({ path }) => path)).toEqual([])
  })

  it('point one way only', () => {
    const wrong = files.flatMap((file) => {
      const { may } = arrows.find(arrow => arrow.from.test(file.path))!
      return importsOf(file).filter(target => !may.test(target)).map(target => `${file.path} imports ${target}`)
    })
    expect(wrong).toEqual([])
  })
})
