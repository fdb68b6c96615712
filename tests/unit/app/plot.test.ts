import { describe, expect, it } from 'vitest'
import { bounceSand, headMotion, nodalLines, rodAngle, strewSand } from '../../../app/utils/sand'
import { placeFlags, spectrumColumns, spectrumRange } from '../../../app/utils/spectrumPlot'

const mode = (m: number, n: number, measuredHz: number, levelDb = 0) => ({ m, n, measuredHz, predictedHz: measuredHz, u95Hz: 0.1, levelDb, t60S: 0.5 })

describe('the spectrum on the plate', () => {
  it('never loses a narrow peak between two columns', () => {
    const levelDb = Array.from({ length: 4000 }, (_, bin) => bin === 1777 ? 0 : -60)
    const points = spectrumColumns({ fromHz: 0, stepHz: 0.25, levelDb }, 0, 1000, 300)
    expect(Math.max(...points.map(point => point.db))).toBe(0)
    expect(points.find(point => point.db === 0)?.hz).toBe(1777 * 0.25)
  })

  it('shows every matched mode with room for its flag', () => {
    const { fromHz, toHz } = spectrumRange([mode(0, 1, 140), mode(3, 1, 600)], { fromHz: 0, stepHz: 1, levelDb: new Array<number>(2000).fill(-60) })
    expect(fromHz).toBeLessThan(140)
    expect(toHz).toBeGreaterThan(600)
  })

  it('keeps every label off the others and off their poles', () => {
    const room = { labelWidth: 46, lineHeight: 16, topY: 12, rightX: 1200, gap: 5, curveTopY: () => 190 }
    const flags = [100, 132, 160, 420, 430, 900, 1180].map((x, index) => ({ key: String(index), x, peakY: 180 - 7 * (index % 3) }))
    const placed = placeFlags(flags, room).filter(flag => flag.labelled)
    expect(placed.length).toBeGreaterThanOrEqual(flags.length - 1)
    const box = (flag: typeof placed[number]) => ({
      left: flag.anchor === 'start' ? flag.x : flag.x - room.gap - room.labelWidth,
      right: flag.anchor === 'start' ? flag.x + room.gap + room.labelWidth : flag.x,
      top: flag.labelY - 12, bottom: flag.labelY,
    })
    for (const a of placed) {
      for (const b of placed.filter(other => other.key !== a.key)) {
        const [p, q] = [box(a), box(b)]
        expect(p.left < q.right && q.left < p.right && p.top < q.bottom && q.top < p.bottom, `labels ${a.key} and ${b.key} overlap`).toBe(false)
        const crosses = b.x > p.left + 1 && b.x < p.right - 1 && b.labelY - 9 < p.bottom && b.peakY > p.top
        expect(crosses, `the pole of ${b.key} crosses the label of ${a.key}`).toBe(false)
      }
    }
  })

  it('leaves a label out where there is no room, and never lays one on the curve', () => {
    const curveTopY = (left: number, right: number) => left < 260 && right > 240 ? 40 : 190
    const room = { labelWidth: 46, lineHeight: 16, topY: 12, rightX: 360, gap: 5, curveTopY }
    const crowd = Array.from({ length: 30 }, (_, index) => ({ key: String(index), x: 20 + 11 * index, peakY: 180 }))
    const placed = placeFlags(crowd, room)
    expect(placed).toHaveLength(30)
    expect(placed.some(flag => !flag.labelled)).toBe(true)
    for (const flag of placed.filter(one => one.labelled)) {
      const left = flag.anchor === 'start' ? flag.x : flag.x - 51
      expect(flag.labelY).toBeLessThan(curveTopY(left, left + 51))
    }
  })
})

describe('the sand figure', () => {
  it('settles on the nodal diameter of (1,1) and leaves the bellies', () => {
    const strike = rodAngle(1, 8)
    const sand = strewSand(1500, 5)
    const motion = headMotion([mode(1, 1, 200)], strike, 0.85)
    for (let bounce = 0; bounce < 900; bounce++) bounceSand(sand, motion, 0.04)
    // Rod 1 is on top, so the nodal diameter lies level: y = 0. The rim is a nodal line as well.
    const near = [...sand.y].filter((y, grain) => Math.abs(y) < 0.1 || Math.hypot(sand.x[grain]!, y) > 0.9).length
    // Evenly strewn, 32 % of the grains lie there (areas of the strip and the ring); most of the rest must have gone.
    expect(near / 1500).toBeGreaterThan(0.75)
  })

  it('draws the same figure for the same reading', () => {
    const settle = () => {
      const sand = strewSand(200, 42)
      const motion = headMotion([mode(0, 1, 140), mode(1, 1, 210, -3)], 0.3, 0.6)
      for (let bounce = 0; bounce < 50; bounce++) bounceSand(sand, motion, 0.04)
      return [...sand.x]
    }
    expect(settle()).toEqual(settle())
  })

  it('places nodal circles by the zeros of the Bessel functions', () => {
    // Abramowitz & Stegun table 9.5: j_0,1 = 2.40483, j_0,2 = 5.52008; their ratio is the circle of (0,2).
    expect(nodalLines(0, 2, 0).circles[0]).toBeCloseTo(2.40483 / 5.52008, 4) // 4 digits: the table's five figures
    expect(nodalLines(2, 1, 0).diameters).toEqual([Math.PI / 4, 3 * Math.PI / 4])
  })

  it('counts rods clockwise from the top', () => {
    expect(rodAngle(1, 8)).toBe(Math.PI / 2)
    expect(rodAngle(3, 8)).toBeCloseTo(0, 12) // 12 digits: rounding of doubles
  })
})
