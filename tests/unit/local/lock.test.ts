import { spawn } from 'node:child_process'
import { randomUUID } from 'node:crypto'
import { expect, it } from 'vitest'
import { lockFolder, LockedError } from '../../../local/lock'

it('lets one holder at a time have a folder, and tells others which process it is', async () => {
  const folder = `/nowhere/${randomUUID()}`
  const lock = await lockFolder(folder, 'start')
  const refusal = await lockFolder(folder, 'start').catch((error: unknown) => error)
  expect(refusal).toBeInstanceOf(LockedError)
  expect((refusal as LockedError).holder).toBe(String(process.pid))
  const other = await lockFolder(`${folder}-other`, 'start')
  await other.release()
  await lock.release()
  await (await lockFolder(folder, 'start')).release()
})

it('is free again when its holder was killed outright', async () => {
  const folder = `/nowhere/${randomUUID()}`
  const code = `const { lockFolder } = await import(${JSON.stringify(new URL('../../../local/lock.ts', import.meta.url).href)}); await lockFolder(${JSON.stringify(folder)}, 'start'); console.log('held'); setInterval(() => {}, 1000)`
  const holder = spawn(process.execPath, ['--import', 'tsx', '--input-type=module', '-e', code], { stdio: ['ignore', 'pipe', 'inherit'] })
  await new Promise(resolve => holder.stdout.once('data', resolve))
  await expect(lockFolder(folder, 'start')).rejects.toBeInstanceOf(LockedError)
  const ended = new Promise(resolve => holder.once('exit', resolve))
  holder.kill('SIGKILL')
  await ended
  await (await lockFolder(folder, 'start')).release()
})
