import { describe, expect, it } from 'vitest'
import { bareDiameterDrum, createHeadDesign, type DesignDrum, type DesignFilm } from '../../../shared/utils/headDesign'
import { assessHead, pitchWords } from '../../../shared/utils/headDesignWords'

// PET figures as physics.md section 9 gives them, from memory of film data sheets.
const pet = (id: string, thicknessUm: number, yieldMPa = 100): DesignFilm => ({
  id, name: id, plies: 1, thicknessUm, densityKgM3: 1390, modulusGPa: 4.5, poisson: 0.38, yieldMPa, arealDensityKgM2: thicknessUm * 1e-6 * 1390,
})
const clear = pet('clear', 250)
const strong = pet('strong', 250, 220)
const tom = bareDiameterDrum(349.25)

describe('a head design', () => {
  it('finds the tension that sounds the wanted pitch, on every construction', () => {
    const drums: DesignDrum[] = [
      tom, { construction: 'frame', diameterMm: 330, depthMm: 60, bowlVolumeL: null }, { construction: 'open', diameterMm: 330, depthMm: 200, bowlVolumeL: null },
      { construction: 'double-headed', diameterMm: 330, depthMm: 250, bowlVolumeL: null },
    ]
    for (const drum of drums) {
      const { fundamentalHz } = createHeadDesign(drum, clear).predict({ kind: 'pitch', hz: 130.81 })
      expect(fundamentalHz, drum.construction).toBeCloseTo(130.81, 5) // the solver stops at 1e-9 of the pitch
    }
  })

  it('gives the same pitch for the tension that it found', () => {
    const design = createHeadDesign(tom, clear)
    const { tensionNPerM } = design.predict({ kind: 'pitch', hz: 146.83 })
    expect(design.predict({ kind: 'tension', nPerM: tensionNPerM }).fundamentalHz).toBeCloseTo(146.83, 6) // the same figures again
  })

  it('raises the pitch by close to the square root of tension', () => {
    const design = createHeadDesign(tom, clear)
    const ratio = design.predict({ kind: 'tension', nPerM: 6000 }).fundamentalHz / design.predict({ kind: 'tension', nPerM: 3000 }).fundamentalHz
    // Rayleigh: sqrt(2) = 1.4142 without air; the air's mass grows a little with frequency, bending takes a little at low tension.
    expect(ratio).toBeCloseTo(Math.SQRT2, 1) // 4 % covers both at these pitches
  })

  it('lets a film serve from 1 to 60 % of its yield stress', () => {
    const { lowestNPerM, highestNPerM, lowestHz, highestHz } = createHeadDesign(tom, clear).range()
    // T = share * 100 MPa * 250 um: 250 and 15000 N/m, by hand.
    expect([lowestNPerM, highestNPerM]).toEqual([expect.closeTo(250, 6), expect.closeTo(15_000, 6)])
    expect(assessHead(tom, clear, [clear], { kind: 'pitch', hz: highestHz * 0.999 }).reachable).toBe(true)
    expect(assessHead(tom, clear, [clear], { kind: 'pitch', hz: highestHz * 1.001 }).reachable).toBe(false)
    expect(assessHead(tom, clear, [clear], { kind: 'pitch', hz: lowestHz * 0.999 }).reachable).toBe(false)
  })

  it('names the film that carries an out-of-reach pitch with the least of its yield', () => {
    const stronger = pet('stronger', 250, 400)
    const { reachable, otherFilmId, message } = assessHead(tom, clear, [clear, strong, stronger], { kind: 'pitch', hz: 400 })
    expect({ reachable, otherFilmId }).toEqual({ reachable: false, otherFilmId: 'stronger' })
    expect(message).toContain('clear reaches at most')
    expect(message).toContain('stronger would reach it')
  })

  it('says so when no film of the catalogue will do, with what to change', () => {
    expect(assessHead(tom, clear, [clear], { kind: 'pitch', hz: 1500 }).message).toContain('choose a lower pitch or a smaller diameter')
    expect(assessHead(tom, clear, [clear], { kind: 'pitch', hz: 20 }).message).toContain('choose a higher pitch or a larger diameter')
  })

  it('tunes a kettle by its principal tone when asked to', () => {
    const kettle: DesignDrum = { construction: 'kettle', diameterMm: 660, depthMm: 0, bowlVolumeL: 140 }
    const { modes } = createHeadDesign(kettle, pet('thin', 190), 'principal').predict({ kind: 'pitch', hz: 110, of: 'principal' })
    expect(modes.find(mode => mode.m === 1 && mode.n === 1)!.hz).toBeCloseTo(110, 5) // the solver stops at 1e-9 of the pitch
  })

  it('writes a pitch as a note with its cents', () => {
    // ISO 16:1975, A4 = 440 Hz: 440 is A4 itself, 446.4 lies 25 cents above (1200 log2(446.4/440) = 25.0, by hand).
    expect(pitchWords(440)).toBe('A4')
    expect(pitchWords(446.4)).toBe('A4 +25 cents')
    expect(pitchWords(434)).toBe('A4 −24 cents')
  })
})
