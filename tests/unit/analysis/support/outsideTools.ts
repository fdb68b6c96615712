import { execFileSync } from 'node:child_process'
import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'

/** Runs a Debian program that writes a file, and gives the file's bytes; says how to get the program where it is missing. */
function fileFrom(program: string, debianPackage: string, args: (path: string) => string[], name = 'out.wav'): Uint8Array {
  const folder = mkdtempSync(join(tmpdir(), 'rimwright-test-'))
  try {
    const path = join(folder, name)
    try {
      execFileSync(program, args(path), { stdio: ['ignore', 'ignore', 'pipe'] })
    } catch (error) {
      if ((error as NodeJS.ErrnoException).code === 'ENOENT') throw new Error(`This test needs ${program}: apt-get install ${debianPackage}`, { cause: error })
      throw error
    }
    return readFileSync(path)
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}

/** A file written by sox: `format` goes before the output name, `effects` after it. */
export const soxFile = (format: string[], effects: string[], name = 'out.wav') => fileFrom('sox', 'sox', path => ['-D', '-n', ...format, path, ...effects], name)

/** What sox streams to a pipe: it cannot go back to fill in the lengths. */
export function soxStream(format: string[], effects: string[]): Uint8Array {
  try {
    return execFileSync('sox', ['-D', '-n', ...format, '-t', 'wav', '-', ...effects], { stdio: ['ignore', 'pipe', 'ignore'], maxBuffer: 64 * 1024 * 1024 })
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ENOENT') throw new Error('This test needs sox: apt-get install sox', { cause: error })
    throw error
  }
}

/** A sentence spoken by espeak-ng. */
export const speech = (text: string, voice = 'en-us') => fileFrom('espeak-ng', 'espeak-ng', path => ['-v', voice, '-w', path, text])

/** A WAV taken through sox: format options of the output, then effects. */
export function soxConverted(wav: Uint8Array, format: string[], effects: string[]): Uint8Array {
  try {
    return execFileSync('sox', ['-D', '-t', 'wav', '-', ...format, '-t', 'wav', '-', ...effects], { input: wav, stdio: ['pipe', 'pipe', 'ignore'], maxBuffer: 64 * 1024 * 1024 })
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ENOENT') throw new Error('This test needs sox: apt-get install sox', { cause: error })
    throw error
  }
}
