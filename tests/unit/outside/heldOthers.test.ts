/**
 * Forty sounds that must be refused, by the code that tells the maker what to do: real voices and music from Debian's
 * espeak-ng, fluid-soundfont-gm and sonic-pi-samples, hum and noise by sox, and simulated taps spoiled by clipping or
 * by a cut. None of them was used when the refusals were decided.
 */
import { beforeAll, describe, expect, it } from 'vitest'
import { analyseRecording } from '../../../server/utils/analysis/analyse'
import { simulateTap, writeWav16 } from '../../support/drum'
import { CONSTRUCTIONS, drawCase } from '../../support/drum/cases'
import { requestFor } from '../accuracy/readTap'
import { soxFile, speech } from '../analysis/support/outsideTools'
import { renderPhrase, requirePackages, sonicPiSample, type PhraseNote } from './soundfont'

interface Sound { name: string, codes: string[], wav: () => Uint8Array }

const NOT_A_TAP = ['no-tap', 'not-a-drum']
const sox = (...effects: string[]) => soxFile(['-r', '48000', '-b', '16', '-R'], effects)

const SILENCE: Sound[] = [
  { name: 'digital silence', wav: () => sox('trim', '0', '2') },
  { name: 'a hiss at -75 dB of full scale', wav: () => sox('synth', '2', 'pinknoise', 'gain', '-75') },
  { name: 'an offset with nothing on it', wav: () => sox('trim', '0', '2', 'dcshift', '0.3') },
  { name: 'hum at -70 dB of full scale', wav: () => sox('synth', '2', 'sine', '50', 'gain', '-70') },
].map(sound => ({ ...sound, codes: ['silent'] }))

const STEADY: Sound[] = [
  { name: '60 Hz hum', wav: () => sox('synth', '3', 'sine', '60', 'gain', '-10') },
  { name: 'a buzzing transformer', wav: () => sox('synth', '3', 'sawtooth', '100', 'gain', '-14') },
  { name: 'a fan', wav: () => sox('synth', '3', 'brownnoise', 'gain', '-10') },
  { name: 'hum that is switched on', wav: () => sox('synth', '2', 'sine', '50', 'gain', '-6', 'pad', '0.5', '0.2') },
].map(sound => ({ ...sound, codes: NOT_A_TAP }))

const SPOKEN: Sound[] = ([
  ['en-gb', 'Is the drum back from the workshop yet? No, not before Thursday.'],
  ['en-us+f4', 'Turn the third rod a quarter, then the one across from it.'],
  ['en-gb-scotland', 'Tap, tap, tap. Ten. Twelve. Fourteen.'],
  ['de+m3', 'Bitte klopfen Sie jetzt in die Mitte des Fells.'],
  ['fr+f2', 'Tapez doucement, puis attendez que le son se taise.'],
  ['es+m1', 'Pero, ¿qué pasa con el tambor? Toca otra vez.'],
  ['it', 'Batti un colpo solo, piano, vicino al bordo.'],
  ['nl+f1', 'Tik één keer op het vel en wacht.'],
] as const).map(([voice, text]) => ({ name: `a voice (${voice})`, codes: NOT_A_TAP, wav: () => speech(text, voice) }))

/** A line of quarter notes, 0.4 s each, held to the next. */
const melody = (notes: number[]): PhraseNote[] => notes.map((note, i) => ({ at: 400 * i, note, held: 390 }))
const chords = (roots: number[]): PhraseNote[] => roots.flatMap((root, i) => [0, 4, 7].map(step => ({ at: 800 * i, note: root + step, held: 780 })))
const MUSIC: Sound[] = ([
  ['piano chords', 0, chords([48, 53, 55, 48])],
  ['a church organ', 19, chords([48, 53, 55, 48])],
  ['a nylon guitar', 24, melody([52, 55, 59, 64, 59, 55, 52, 50])],
  ['a bowed cello', 42, melody([36, 40, 43, 48, 47, 43])],
  ['a trumpet', 56, melody([60, 64, 67, 72, 67, 64])],
  ['a flute', 73, melody([72, 74, 76, 79, 76, 74])],
  ['a string section', 48, chords([50, 55, 57, 50])],
] as const).map(([name, program, notes]) => ({ name: `music: ${name}`, codes: NOT_A_TAP, wav: () => renderPhrase(0, program, [...notes]) }))
const LOOPS: Sound[] = ['ambi_choir', 'ambi_drone'].map(name => ({ name: `music: ${name.replace('_', ' ')}`, codes: NOT_A_TAP, wav: () => sonicPiSample(name) }))

const CLAPS: Sound[] = [
  // General MIDI 1 percussion map: 39 hand clap, 42 closed and 46 open hi-hat, 49 crash cymbal.
  { name: 'two hand claps', wav: () => renderPhrase(9, 0, [{ at: 0, note: 39, held: 300 }, { at: 900, note: 39, held: 300 }]) },
  { name: 'a closed hi-hat', wav: () => renderPhrase(9, 0, [{ at: 0, note: 42, held: 300 }, { at: 900, note: 42, held: 300 }]) },
  { name: 'a crash cymbal', wav: () => renderPhrase(9, 0, [{ at: 0, note: 49, held: 2000 }]) },
  { name: 'fingers snapping', wav: () => sonicPiSample('perc_snap') },
  { name: 'applause', wav: () => renderPhrase(0, 126, [{ at: 0, note: 60, held: 2500 }]) },
].map(sound => ({ ...sound, codes: [...NOT_A_TAP, 'too-short'] }))

const SPOILED: Sound[] = CONSTRUCTIONS.flatMap((construction, i) => {
  const { tap } = drawCase(construction, 7100 + i, { snrDb: 40, place: 'edge' })
  const spec = { ...tap, recording: { ...tap.recording, sampleRateHz: 48_000, hum: undefined, room: undefined, peakDbfs: -1 } }
  return [
    {
      name: `a ${construction} tap clipped by 15 dB`, codes: ['clipped'],
      wav: () => writeWav16(simulateTap(spec).samples.map(x => Math.max(-1, Math.min(1, 5.6 * x))), 48_000),
    },
    {
      name: `a ${construction} tap cut after 30 ms`, codes: ['too-short'],
      wav: () => {
        const { samples, truth } = simulateTap(spec)
        return writeWav16(samples.subarray(0, Math.round((truth.onsetS + 0.03) * 48_000)), 48_000)
      },
    },
  ]
})

const SOUNDS = [...SILENCE, ...STEADY, ...SPOKEN, ...MUSIC, ...LOOPS, ...CLAPS, ...SPOILED]

describe('a sound that must be refused', () => {
  beforeAll(requirePackages)
  const { tap, place, rodCount, film } = drawCase('open', 7000)
  const onHead = (wav: Uint8Array) => ({ ...requestFor({ samples: new Float64Array(1), sampleRateHz: 48_000, truth: simulateTap(tap).truth }, tap, place, rodCount, film), wav })

  it('stands forty times in this set', () => {
    expect(new Set(SOUNDS.map(sound => sound.name)).size).toBe(40)
  })

  for (const { name, codes, wav } of SOUNDS) {
    it(`is: ${name}`, () => {
      const outcome = analyseRecording(onHead(wav()))
      const found = outcome.kind === 'refused' ? outcome.refusal.code : `read, confidence ${outcome.reading.confidence}, doubtful ${outcome.reading.doubtful}`
      expect(codes).toContain(found)
    })
  }
})
