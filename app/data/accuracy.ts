/** A table of measured figures for the page "What limits the accuracy": what was measured, how, and when. */
export interface MeasuredTable {
  title: string
  /** What was measured, in a sentence or two. */
  about: string
  /** The command that gives the figures, from the project's folder. */
  command: string
  /** Day of the measurement and version of the analysis. */
  on: string
  version: string
  columns: readonly string[]
  /** The first cell of each row names it; the others are figures with their units. */
  rows: readonly (readonly string[])[]
  note?: string
}

/** Measured figures only; the page states nothing about accuracy that does not stand here. */
export const MEASURED: readonly MeasuredTable[] = [
  {
    title: 'How far the tension is off',
    about: 'Taps on a simulated drum that shares no code with the analysis: the full frequency-dependent air, losses, uneven heads to 3 %, noise 15 to 40 dB down, rooms, taps at the centre, half-way and the edge. Readings marked doubtful are left out of the errors and counted apart.',
    command: 'npx tsx tests/bench/accuracy.ts 40 --seed=1',
    on: '1 Dec 2026',
    version: '1.0.0',
    columns: ['construction', 'error, median', '90 % of taps within', 'marked doubtful'],
    rows: [
      ['Proof fixture', '0.32 %', '0.84 %', '0 of 40'],
      ['Open shell', '0.30 %', '0.78 %', '2 of 40'],
      ['Frame', '0.31 %', '0.96 %', '0 of 40'],
      ['Kettle', '0.27 %', '0.77 %', '6 of 40'],
      ['Double-headed', '0.45 %', '1.29 %', '3 of 40'],
    ],
    note: 'One double-headed tap of 40 was wrong by 18 % without a mark.',
  },
  {
    title: 'How often the stated interval holds the truth',
    about: 'The same drums, with diameter, areal density, modulus and temperature drawn at random within what a tape, a data sheet and a bench leave open.',
    command: 'npx tsx tests/bench/accuracy.ts 40 --seed=1 --inputs',
    on: '1 Dec 2026',
    version: '1.0.0',
    columns: ['', 'held the truth', 'stated 95 %, median'],
    rows: [['80 taps', '96 %', '2.1 %']],
  },
]
