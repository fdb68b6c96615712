import { describe, expect, it } from 'vitest'
import { explainLines } from '../../../server/utils/analysis/matching'
import { RefusalError } from '../../../server/utils/analysis/refusal'
import { findingsOf, line, requestOf, type LineCase } from './matching.support'

const explain = (drum: LineCase) => explainLines(findingsOf(drum), requestOf(drum))
const named = (reading: ReturnType<typeof explain>) => reading.modes.map(mode => `${mode.m},${mode.n}`)

describe('a tap\'s lines', () => {
  const singles: LineCase[] = (['fixture', 'frame', 'open'] as const).flatMap(construction => [600, 3000, 9000].flatMap((tensionNPerM, i) => [
    { construction, tensionNPerM, x0: 0.05, seed: 3 + i, airScale: { axisymmetric: 1.02, others: 0.99 }, edgeFactor: 0.3 },
    { construction, tensionNPerM, x0: 0.5, seed: 30 + i, airScale: { axisymmetric: 0.98, others: 1.01 }, edgeFactor: 0.7 },
  ]))

  it.each(singles)('give the tension of a $construction head at $tensionNPerM N/m hit at $x0 R', (drum) => {
    const reading = explain(drum)
    const off = reading.tension.nPerM / drum.tensionNPerM - 1
    expect(Math.abs(off)).toBeLessThan(0.02) // the limit of the issue: 2 % from centre and half-way taps
    expect(Math.abs(off) * drum.tensionNPerM).toBeLessThan(1.5 * reading.tension.u95NPerM) // the air and edge were moved by one standard deviation each
  })

  it('are not read by calling the strongest one (0,1)', () => {
    const drum: LineCase = { construction: 'fixture', tensionNPerM: 2500, x0: 0.6, seed: 8 }
    const findings = findingsOf(drum)
    const reading = explainLines(findings, requestOf(drum))
    const strongest = findings.lines.reduce((a, b) => (b.levelDb > a.levelDb ? b : a))
    expect(strongest.frequencyHz).toBeGreaterThan(1.2 * reading.fundamentalHz)
    expect(Math.abs(reading.tension.nPerM / 2500 - 1)).toBeLessThan(0.02) // the limit of the issue
  })

  it('of a kettle whose (0,1) is not heard are named (1,1), (2,1), (3,1)', () => {
    const drum: LineCase = { construction: 'kettle', tensionNPerM: 4200, x0: 0.75, seed: 5, silent: ['0,1'] }
    const reading = explain(drum)
    expect(named(reading)).toEqual(expect.arrayContaining(['1,1', '2,1', '3,1']))
    expect(Math.abs(reading.tension.nPerM / 4200 - 1)).toBeLessThan(0.02) // the limit of the issue
    const principal = reading.modes.find(mode => mode.m === 1 && mode.n === 1)!
    expect(reading.fundamentalHz).toBeLessThan(principal.measuredHz)
  })

  it('of two heads give the struck head\'s tension though the other sounds along', () => {
    const reading = explain({ construction: 'double-headed', tensionNPerM: 2400, otherTensionNPerM: 2100, x0: 0.7, seed: 11 })
    expect(Math.abs(reading.tension.nPerM / 2400 - 1)).toBeLessThan(0.02) // the limit asked of single heads
    expect(reading.budget.some(part => part.name === 'other head')).toBe(true)
  })

  it('leave strays unexplained without being led astray by them', () => {
    const strays = [line(111.7, -14), line(433.3, -18)]
    const reading = explain({ construction: 'fixture', tensionNPerM: 3000, x0: 0.5, seed: 4, extra: strays })
    expect(Math.abs(reading.tension.nPerM / 3000 - 1)).toBeLessThan(0.02) // the limit of the issue
    expect(reading.unexplained.map(peak => peak.frequencyHz)).toContain(111.7)
  })

  it('that do not decay are named as hum and matched to no mode', () => {
    const reading = explain({ construction: 'frame', tensionNPerM: 2000, x0: 0.5, seed: 6, extra: [line(150.02, 3, { steady: true, gammaPerS: 0 }), line(333.3, -20, { steady: true, gammaPerS: 0 })] })
    expect(reading.unexplained.find(peak => peak.frequencyHz === 150.02)?.cause).toBe('mains hum')
    expect(reading.unexplained.find(peak => peak.frequencyHz === 333.3)?.cause).toBe('a steady tone in the room')
    expect(reading.modes.every(mode => mode.measuredHz !== 150.02)).toBe(true)
  })

  it('that stand in a close pair are one mode with two lines', () => {
    const drum: LineCase = { construction: 'fixture', tensionNPerM: 3000, x0: 0.5, seed: 7, silent: ['1,1'] }
    const whole = explain({ ...drum, silent: [] }).modes.find(mode => mode.m === 1 && mode.n === 1)!.measuredHz
    const reading = explain({ ...drum, extra: [line(whole * 0.997, -4), line(whole * 1.003, -6)] })
    const pair = reading.modes.find(mode => mode.m === 1 && mode.n === 1)!
    expect(pair.splitHz).toEqual([whole * 0.997, whole * 1.003])
    expect(pair.measuredHz).toBeCloseTo(whole, 6) // the mean of the two
  })

  it('that are one single tone are read doubtfully, with advice', () => {
    const drum: LineCase = { construction: 'open', tensionNPerM: 3000, x0: 0.05, seed: 1 }
    const reading = explainLines({ ...findingsOf(drum), lines: [line(140, 0)] }, requestOf(drum))
    expect(reading.doubtful).toBe(true)
    expect(reading.confidence).toBeLessThan(0.6)
    expect(reading.warnings.map(warning => warning.code)).toContain('few-modes')
  })

  it('are refused when none of them decays', () => {
    const drum: LineCase = { construction: 'open', tensionNPerM: 3000, x0: 0.05, seed: 1 }
    const hum = { ...findingsOf(drum), lines: [line(100, 0, { steady: true })] }
    expect(() => explainLines(hum, requestOf(drum))).toThrow(RefusalError)
  })

  it('warn of a film near its yield stress', () => {
    const reading = explain({ construction: 'fixture', tensionNPerM: 22_000, x0: 0.5, seed: 2 })
    expect(reading.warnings.map(warning => warning.code)).toContain('near-yield')
  })
})
