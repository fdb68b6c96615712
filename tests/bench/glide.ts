/**
 * The same simulated drum struck at different strengths: how far pitch and tension are read from its soft tap, and
 * whether what is stated covers it.
 *
 *   npx tsx tests/bench/glide.ts [drums per construction, 4] [--only=open,kettle] [--seed=1] [--verbose]
 *
 * Strengths raise the tension by 0, 1, 3, 8 and 15 % at the moment of the strike; each dry and in a room (-22 dB, 0.4 s).
 */
import { simulateTap } from '../support/drum'
import { CONSTRUCTIONS, drawCase } from '../support/drum/cases'
import { judge, requestFor } from '../unit/accuracy/readTap'
import type { AnalysedReading } from '../../shared/types/reading'

const option = (name: string): string | undefined => process.argv.find(word => word.startsWith(`--${name}=`))?.split('=')[1]
const drums = Math.min(50, Number(process.argv.slice(2).find(word => /^\d+$/.test(word)) ?? 4))
const only = option('only')?.split(',')
const firstSeed = Number(option('seed') ?? 1)
const verbose = process.argv.includes('--verbose')

const RISES = [0.01, 0.03, 0.08, 0.15]
const ROOM = { levelDb: -22, t60S: 0.4 }

interface Row { pitch: number[], tension: number[], covered: number[], marked: number, glides: number[] }

const percentile = (values: number[], q: number) => [...values].map(Math.abs).sort((a, b) => a - b)[Math.min(values.length - 1, Math.floor(q * values.length))] ?? NaN
const percent = (value: number) => `${(100 * value).toFixed(2)} %`

async function read(seed: number, construction: typeof CONSTRUCTIONS[number], glide: number, room: boolean): Promise<AnalysedReading | undefined> {
  const drawn = drawCase(construction, seed, { glide, snrDb: 30 })
  drawn.tap.recording.room = room ? ROOM : undefined
  drawn.tap.recording.hum = undefined
  const sound = simulateTap(drawn.tap)
  const { reading } = await judge(requestFor(sound, drawn.tap, drawn.place, drawn.rodCount, drawn.film), sound.truth)
  return reading
}

/** The modes that both readings name, and the worst of them: a fundamental that one has heard and the other computed says little. */
function worstCommon(soft: AnalysedReading, hard: AnalysedReading): number {
  const shifts = hard.modes.flatMap((mode) => {
    const same = soft.modes.find(other => other.m === mode.m && other.n === mode.n && other.head === mode.head)
    return same && same.levelDb > -15 ? [mode.measuredHz / same.measuredHz - 1] : []
  })
  return shifts.length ? shifts.reduce((a, b) => (Math.abs(b) > Math.abs(a) ? b : a)) : NaN
}

for (const construction of CONSTRUCTIONS) {
  if (only && !only.includes(construction)) continue
  for (const room of [false, true]) {
    const rows = new Map<number, Row>(RISES.map(rise => [rise, { pitch: [], tension: [], covered: [], marked: 0, glides: [] }]))
    for (let seed = firstSeed; seed < firstSeed + drums; seed++) {
      const soft = await read(seed, construction, 0, room)
      if (!soft) continue
      for (const rise of RISES) {
        const hard = await read(seed, construction, rise, room)
        if (!hard) continue
        const row = rows.get(rise)!
        const pitch = hard.fundamentalHz / soft.fundamentalHz - 1
        const tension = hard.tension.nPerM / soft.tension.nPerM - 1
        const told = hard.doubtful || soft.doubtful || hard.warnings.some(w => w.code === 'pitch-glide')
        row.pitch.push(pitch)
        row.tension.push(tension)
        row.covered.push(Math.abs(hard.tension.nPerM - soft.tension.nPerM) / Math.hypot(hard.tension.u95NPerM, soft.tension.u95NPerM))
        row.glides.push(hard.glide?.share ?? 0)
        if (told || (Math.abs(pitch) < 0.005 && Math.abs(tension) < 0.01)) row.marked++
        if (verbose) console.log(`  ${construction} #${seed}${room ? ' room' : ''} rise ${rise}: (0,1) ${percent(pitch)}, worst common mode ${percent(worstCommon(soft, hard))}, T ${percent(tension)}, glide ${percent(hard.glide?.share ?? 0)}${hard.doubtful ? ' doubtful' : ''}`)
      }
    }
    for (const [rise, row] of rows) {
      console.log([
        `${construction}${room ? ', room' : ', dry'}`.padEnd(22), `rise ${percent(rise)}`.padEnd(13),
        `(0,1) moves by median ${percent(percentile(row.pitch, 0.5))}, most ${percent(percentile(row.pitch, 1))}`,
        `T ${percent(percentile(row.tension, 0.5))}, ${percent(percentile(row.tension, 1))}`,
        `inside what is stated ${row.covered.filter(c => c < 1).length} of ${row.covered.length}`,
        `right or told ${row.marked} of ${row.covered.length}`,
        `glide read ${row.glides.map(percent).join(' ')}`,
      ].join('  '))
    }
  }
}
