// Runs the program named first on the command line for as long as the process that started this one lives. A supervisor
// that is killed outright cannot stop its children; the closing of the channel to it can.
import { pathToFileURL } from 'node:url'

const HARD_END_MS = 3000

process.on('disconnect', () => {
  setTimeout(() => process.exit(1), HARD_END_MS).unref()
  process.kill(process.pid, 'SIGTERM')
})
// The channel alone must not keep a program alive that wants to end.
process.channel?.unref()

const [program] = process.argv.splice(2, 1)
if (program.endsWith('.ts')) (await import('tsx/esm/api')).register()
await import(pathToFileURL(program).href)
