/**
 * How right the rim is read: rounds of taps on the independent simulated drum, unevenness 3 to 20 %, five to ten rods, the
 * microphone fixed or following, rooms and noise. Prints, beside the fit, what "all rods equal" gives.
 *
 * npx tsx tests/bench/rim.ts 4 [--only=open] [--seed=21]     (4 rounds of each construction; seconds a round)
 */
import { airAt, createDrumModel } from '../../shared/acoustics'
import { chooseChannel } from '../../server/utils/analysis/channel'
import { toLowBand } from '../../server/utils/analysis/decimate'
import { cutRing } from '../../server/utils/analysis/ring'
import { findTaps } from '../../server/utils/analysis/taps'
import { readWav } from '../../server/utils/analysis/wav'
import { readRim } from '../../server/utils/rim/readRim'
import { roundSpectra } from '../../server/utils/rim/roundSpectra'
import { simulateRound, writeWav16 } from '../support/drum'
import { CONSTRUCTIONS } from '../support/drum/cases'
import { drawRound, type RoundCase } from '../support/drum/rounds'
import { analysedHead } from '../unit/accuracy/readTap'

const [count = '4', ...flags] = process.argv.slice(2)
const flag = (name: string) => flags.find(f => f.startsWith(`--${name}=`))?.split('=')[1]
const seed = Number(flag('seed') ?? 1)
/** The mean tension that the fit starts from is off by this: a reading's own error on an uneven head. */
const START_OFF = 1.02

const rms = (values: ArrayLike<number>) => Math.sqrt(Array.from(values).reduce((sum, v) => sum + v * v, 0) / values.length)

for (const construction of CONSTRUCTIONS.filter(c => !flag('only') || flag('only') === c)) {
  for (let i = 0; i < Number(count); i++) console.log(readOne(drawRound(construction, seed + i)))
}

function readOne({ name, film, round }: RoundCase): string {
  const { samples, sampleRateHz, truth } = simulateRound(round)
  const sound = chooseChannel(readWav(writeWav16(samples, sampleRateHz)))
  const band = toLowBand(sound.samples, sound.sampleRateHz)
  const taps = findTaps(band)
  if (taps.length !== round.rodCount) return `${name}: ${taps.length} taps found`
  const { drum } = round
  const model = createDrumModel({
    geometry: { construction: drum.construction, radiusM: drum.radiusM, depthM: drum.depthM, bowlVolumeM3: drum.bowlVolumeM3 },
    film: analysedHead(drum.batter, 'batter', film), otherFilm: drum.resonant && analysedHead(drum.resonant, 'resonant', 'pet'),
    air: airAt({ temperatureC: drum.temperatureC ?? 20 }),
  })
  const tensionNPerM = START_OFF * drum.batter.tensionNPerM
  const start = performance.now()
  const answer = readRim({
    spectra: roundSpectra(band, taps, cutRing(band, taps[0]!).noisePower), rodCount: round.rodCount, rods: taps.map((_, rod) => rod),
    modes: model.predictModes({ tensionNPerM, otherTensionNPerM: drum.resonant?.tensionNPerM }),
  })
  const ms = performance.now() - start
  const wanted = truth.rodTensionNPerM.map(n => n / truth.tensionNPerM - 1)
  const errors = wanted.map((d, rod) => answer.deviation[rod]! - d)
  const percent = (x: number) => `${(100 * x).toFixed(2)} %`
  return `${name.padEnd(64)} rms at the rods ${percent(rms(errors))} (stated ${percent(rms(answer.standard))}), all equal ${percent(rms(wanted))}, misfit ${answer.misfit.toFixed(2)}, ${Math.round(ms)} ms`
}
