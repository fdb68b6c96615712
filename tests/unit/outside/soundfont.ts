/**
 * Real drums from Debian's packages as WAV bytes: notes of the General MIDI set (fluid-soundfont-gm, MIT licence)
 * rendered by fluidsynth, and the CC0 recordings of sonic-pi-samples decoded by sox. Nothing is skipped when a package
 * is missing: the test fails and says which one to install.
 */
import { execFileSync } from 'node:child_process'
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'

const SOUNDFONT = '/usr/share/sounds/sf2/FluidR3_GM.sf2'
const SONIC_PI = '/usr/share/sonic-pi/samples'

/** Fails with the packages to install. */
export function requirePackages(): void {
  const missing: string[] = []
  if (!existsSync(SOUNDFONT)) missing.push('fluid-soundfont-gm')
  if (!existsSync('/usr/bin/fluidsynth')) missing.push('fluidsynth')
  if (!existsSync('/usr/bin/sox')) missing.push('sox')
  if (!existsSync(`${SONIC_PI}/drum_tom_mid_soft.flac`)) missing.push('sonic-pi-samples')
  if (missing.length > 0) throw new Error(`Outside recordings are missing: apt-get install ${missing.join(' ')}`)
}

let folder: string | undefined
const kept = new Map<string, Uint8Array>()

function workFolder(): string {
  if (!folder) {
    const made = mkdtempSync(join(tmpdir(), 'rimwright-outside-'))
    process.on('exit', () => rmSync(made, { recursive: true, force: true }))
    folder = made
  }
  return folder
}

/** A note of a phrase: when it starts and how long it is held, ticks of 1 ms. */
export interface PhraseNote { at: number, note: number, held: number, velocity?: number }

/** A standard MIDI file of format 0 (MIDI 1.0, RP-001): half a second of rest, then the notes; a tick is 1 ms. */
export function phraseMidi(channel: number, program: number, notes: PhraseNote[]): Uint8Array {
  const REST = 500
  const length = (ticks: number): number[] => ticks < 128 ? [ticks] : [0x80 | (ticks >> 7), ticks & 0x7F]
  const events = notes.flatMap(({ at, note, held, velocity }) => [
    { at: REST + at, bytes: [0x90 | channel, note, velocity ?? 90] }, { at: REST + at + held, bytes: [0x80 | channel, note, 0] },
  ]).sort((a, b) => a.at - b.at)
  let now = 0
  const track = [0, 0xC0 | channel, program]
  for (const { at, bytes } of events) {
    track.push(...length(at - now), ...bytes)
    now = at
  }
  track.push(0, 0xFF, 0x2F, 0)
  const number = (value: number, bytes: number): number[] => Array.from({ length: bytes }, (_, i) => (value >> (8 * (bytes - 1 - i))) & 0xFF)
  const text = (value: string): number[] => [...value].map(letter => letter.charCodeAt(0))
  return Uint8Array.from([...text('MThd'), ...number(6, 4), ...number(0, 2), ...number(1, 2), ...number(500, 2), ...text('MTrk'), ...number(track.length, 4), ...track])
}

/** Notes of the General MIDI set as stereo WAV at 48 kHz, reverb and chorus off. */
export function renderPhrase(channel: number, program: number, notes: PhraseNote[]): Uint8Array {
  const key = [channel, program, ...notes.map(n => `${n.at}n${n.note}h${n.held}v${n.velocity ?? 90}`)].join('-').slice(0, 200)
  const found = kept.get(key)
  if (found) return found
  requirePackages()
  const midi = join(workFolder(), `${key}.mid`)
  const wav = join(workFolder(), `${key}.wav`)
  writeFileSync(midi, phraseMidi(channel, program, notes))
  execFileSync('/usr/bin/fluidsynth', ['-ni', '-R', '0', '-C', '0', '-g', '0.8', '-r', '48000', '-T', 'wav', '-F', wav, SOUNDFONT, midi], { stdio: 'ignore', timeout: 30_000 })
  const bytes = new Uint8Array(readFileSync(wav))
  kept.set(key, bytes)
  return bytes
}

/** One note of the General MIDI set, held three seconds. */
export function renderNote(channel: number, program: number, note: number, velocity = 90): Uint8Array {
  return renderPhrase(channel, program, [{ at: 0, note, held: 3000, velocity }])
}

/** A recording of sonic-pi-samples, led in by 0.3 s of silence and followed by 0.3 s more. */
export function sonicPiSample(name: string): Uint8Array {
  const found = kept.get(name)
  if (found) return found
  requirePackages()
  const wav = join(workFolder(), `${name}.wav`)
  execFileSync('/usr/bin/sox', [`${SONIC_PI}/${name}.flac`, '-b', '24', wav, 'pad', '0.3', '0.3'], { timeout: 30_000 })
  const bytes = new Uint8Array(readFileSync(wav))
  kept.set(name, bytes)
  return bytes
}
