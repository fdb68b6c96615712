import { basename } from 'node:path'
import { fileURLToPath } from 'node:url'
import { build } from 'esbuild'

const SUFFIX = '?node-worker'

/**
 * Bundles a worker entry into one file that shares no chunk with the server. A worker emitted as a chunk of the server's
 * own build would import the server entry and boot a second server inside the thread.
 */
export async function bundleNodeWorker(entry: string) {
  const result = await build({
    entryPoints: [entry],
    bundle: true,
    write: false,
    platform: 'node',
    format: 'esm',
    target: 'node20',
    metafile: true,
    legalComments: 'none',
    banner: { js: 'import { createRequire as __createRequire } from "node:module"; const require = __createRequire(import.meta.url);' },
  })
  return { source: result.outputFiles[0]!.text, inputs: Object.keys(result.metafile.inputs) }
}

/** Rollup plugin: `import url from './x?node-worker'` gives a function that returns the URL of the bundled worker. */
export function nodeWorkerPlugin() {
  return {
    name: 'rimwright-node-worker',
    async resolveId(this: RollupContext, source: string, importer: string | undefined) {
      if (!source.endsWith(SUFFIX)) return null
      const resolved = await this.resolve(source.slice(0, -SUFFIX.length), importer, { skipSelf: true })
      if (!resolved) throw new Error(`Worker entry ${source} not found`)
      return resolved.id + SUFFIX
    },
    async load(this: RollupContext, id: string) {
      if (!id.endsWith(SUFFIX)) return null
      const entry = id.slice(0, -SUFFIX.length)
      const { source, inputs } = await bundleNodeWorker(entry.startsWith('file:') ? fileURLToPath(entry) : entry)
      for (const input of inputs) this.addWatchFile(input)
      const fileName = `workers/${basename(entry).replace(/\.ts$/, '')}.mjs`
      this.emitFile({ type: 'asset', fileName, source })
      // A function, called later: at module load import.meta.url is not yet the file's real address.
      return `export default () => new URL(${JSON.stringify(`./${fileName}`)}, import.meta.url)`
    },
  }
}

interface RollupContext {
  resolve(source: string, importer: string | undefined, options: { skipSelf: boolean }): Promise<{ id: string } | null>
  addWatchFile(id: string): void
  emitFile(file: { type: 'asset', fileName: string, source: string }): string
}
