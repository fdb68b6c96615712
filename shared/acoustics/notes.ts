/** ISO 16:1975 standard tuning frequency. */
const A4_HZ = 440
const A4_NUMBER = 69
const SHARP_NAMES = ['C', 'C#', 'D', 'D#', 'E', 'F', 'F#', 'G', 'G#', 'A', 'A#', 'B'] as const
const STEPS: Record<string, number> = { C: 0, D: 2, E: 4, F: 5, G: 7, A: 9, B: 11 }

export interface NoteReading {
  /** Name with octave, 'C#4'. */
  name: string
  /** Number of the note in semitones, C4 = 60. */
  number: number
  /** Frequency of the note itself, Hz. */
  noteHz: number
  /** How far the sound lies above the note, cents, -50 to 50. */
  cents: number
}

/**
 * Frequency of a note in twelve-tone equal temperament, Hz: 440 * 2^((number - 69) / 12).
 *
 * @param number  semitones, C4 = 60, A4 = 69; need not be whole
 * Source: ISO 16:1975 (A4 = 440 Hz).
 */
export function noteHz(number: number): number {
  return A4_HZ * 2 ** ((number - A4_NUMBER) / 12)
}

/**
 * Number of a note written as a letter, an accidental (#, b, or the musical signs) and an octave: 'D3', 'C#4', 'Bb2'.
 *
 * @returns semitones with C4 = 60, or undefined when the text is no note
 */
export function parseNote(text: string): number | undefined {
  const match = /^\s*([A-Ga-g])(##|bb|[#b\u266f\u266d])?\s*(-?\d)\s*$/.exec(text)
  if (!match) return undefined
  const step = STEPS[match[1]!.toUpperCase()]!
  const accidental = { '##': 2, '#': 1, '\u266f': 1, 'b': -1, '\u266d': -1, 'bb': -2 }[match[2] ?? ''] ?? 0
  return 12 * (Number(match[3]) + 1) + step + accidental
}

/** Frequency of a note by name, Hz, or undefined when the text is no note. Source: ISO 16:1975. */
export function parseNoteHz(text: string): number | undefined {
  const number = parseNote(text)
  return number === undefined ? undefined : noteHz(number)
}

/** Interval from one frequency to another, cents: 1200 log2(to / from). @throws RangeError when one is not positive */
export function centsBetween(fromHz: number, toHz: number): number {
  if (!(fromHz > 0 && toHz > 0)) throw new RangeError('frequencies must be positive')
  return 1200 * Math.log2(toHz / fromHz)
}

/**
 * Nearest note to a frequency, with the distance in cents; sharps rather than flats.
 *
 * @throws RangeError when the frequency is not finite and positive
 */
export function nearestNote(frequencyHz: number): NoteReading {
  if (!(Number.isFinite(frequencyHz) && frequencyHz > 0)) throw new RangeError(`frequency must be finite and positive, not ${frequencyHz}`)
  const number = Math.round(A4_NUMBER + 12 * Math.log2(frequencyHz / A4_HZ))
  const pitch = noteHz(number)
  const octave = Math.floor(number / 12) - 1
  return { name: `${SHARP_NAMES[((number % 12) + 12) % 12]}${octave}`, number, noteHz: pitch, cents: centsBetween(pitch, frequencyHz) }
}
