import { readdirSync, readFileSync } from 'node:fs'
import { join, relative, sep } from 'node:path'
import { fileURLToPath } from 'node:url'

export const root = fileURLToPath(new URL('../../..', import.meta.url))

export interface SourceFile { path: string, text: string }

/** Files below these folders of the project, by path from its root. */
export function sources(folders: string[], endings: RegExp): SourceFile[] {
  return folders.flatMap(folder => readdirSync(join(root, folder), { recursive: true, withFileTypes: true }))
    .filter(entry => entry.isFile() && endings.test(entry.name))
    .map((entry) => {
      const full = join(entry.parentPath, entry.name)
      return { path: relative(root, full).split(sep).join('/'), text: readFileSync(full, 'utf8') }
    })
    .sort((a, b) => a.path.localeCompare(b.path))
}
