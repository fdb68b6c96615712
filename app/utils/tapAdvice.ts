import type { ReadingView } from './readingParts'

/** What a next tap should do otherwise so that its reading can be trusted: by construction and by how this one was struck. */
export function tapAdvice({ strike, instrument, recording }: Pick<ReadingView, 'strike' | 'instrument' | 'recording'>): string[] {
  const where = instrument.construction === 'kettle'
    ? 'Tap a quarter of the way in from the edge: at the centre a kettle gives little but air.'
    : instrument.construction === 'double-headed'
      ? 'Tap near the edge, and rest a hand on the other head if it can be muted.'
      : strike === 'centre'
        ? 'Tap three quarters of the way out: a tap at the centre sounds too few modes.'
        : 'Tap once more at another rod, three quarters of the way out.'
  return [
    where,
    ...(recording.centreDamped && strike !== 'centre' ? ['Take the finger off the centre: the modes that it damps are missed here.'] : []),
    'Softly, with the microphone 5 to 30 cm from the film; a third of a second of quiet before, a second and a half of ring after.',
  ]
}
