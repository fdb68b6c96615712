/** A drum of the demo, with the tension its maker likes. Invented; sizes and tensions are ones of the trade (common practice, no source). */
export interface DemoDrum {
  name: string
  construction: 'open' | 'frame' | 'double-headed' | 'kettle' | 'fixture'
  diameterMm: number
  depthMm: number
  bowlVolumeL?: number
  rods: number
  owner: string | null
  film: string
  tensionNPerM: number
  resonant?: { film: string, tensionNPerM: number }
  hoop: string
}

const MM = 25.4
/** The bearing edge stands this far inside the shell's nominal size, each side (common practice, no source). */
const EDGE_MM = 3.2

type Row = [name: string, inches: number, depthIn: number, rods: number, owner: string | null, film: string, tensionNPerM: number, hoop: string]

const vibrating = (inches: number) => Math.round((inches * MM - 2 * EDGE_MM) * 10) / 10
const drum = (construction: DemoDrum['construction']) => ([name, inches, depthIn, rods, owner, film, tensionNPerM, hoop]: Row): DemoDrum =>
  ({ name, construction, diameterMm: vibrating(inches), depthMm: Math.round(depthIn * MM), rods, owner, film, tensionNPerM, hoop })

/** A kettle's bowl holds about what half an ellipsoid of half its width in depth does. */
const kettle = (row: Row): DemoDrum => {
  const base = drum('kettle')(row)
  const radiusM = base.diameterMm / 2000
  return { ...base, depthMm: Math.round(base.diameterMm * 0.55), bowlVolumeL: Math.round(2 / 3 * Math.PI * radiusM ** 2 * (base.diameterMm * 0.55e-3) * 1000) }
}
const twoHeads = (row: Row, film: string, tensionNPerM: number): DemoDrum => ({ ...drum('double-headed')(row), resonant: { film, tensionNPerM } })

const open: Row[] = [
  ['10 in rack tom, birch shell', 10, 7, 6, 'player', 'pet-250', 2650, 'Flanged steel'],
  ['12 in rack tom, birch shell', 12, 8, 6, 'player', 'pet-250', 2700, 'Flanged steel'],
  ['14 in floor tom, ash shell', 14, 8, 8, 'player', 'pet-250', 3100, 'Ash'],
  ['16 in floor tom, ash shell', 16, 14, 8, 'studio', 'pet-2x188', 3300, 'Ash'],
  ['13 in concert tom, open', 13, 10, 6, 'school', 'pet-250-frost', 2900, 'Flanged steel'],
  ['15 in concert tom, open', 15, 12, 8, 'school', 'pet-250-frost', 3000, 'Flanged steel'],
  ['8 in concert tom, open', 8, 7, 5, 'school', 'pet-188', 2300, 'Flanged steel'],
  ['6 in concert tom, open', 6, 6, 5, 'school', 'pet-188', 2000, 'Flanged steel'],
  ['11 in conga, oak stave', 11, 28, 5, 'noor', 'skin-calf', 4100, 'Curved steel'],
  ['12 in conga, oak stave', 12.25, 28, 5, 'noor', 'skin-calf', 3900, 'Curved steel'],
  ['14 in timbale, brass shell', 14, 6.5, 6, 'sander', 'pet-188', 3600, 'Straight steel'],
  ['15 in timbale, brass shell', 15, 6.5, 6, 'sander', 'pet-188', 3500, 'Straight steel'],
]
const frame: Row[] = [
  ['16 in frame drum, bent ash', 16, 2.5, 8, 'petra', 'skin-goat', 1300, 'Tacked rim with rods'],
  ['14 in frame drum, bent ash', 14, 2.5, 6, 'petra', 'skin-goat', 1250, 'Tacked rim with rods'],
  ['18 in frame drum, cherry', 18, 3, 8, 'tomas', 'pet-188', 1500, 'Inner ring'],
  ['10 in tambour, cherry', 10, 2, 5, 'tomas', 'pet-188', 1200, 'Inner ring'],
  ['22 in ocean-deep frame drum', 22, 3.5, 10, null, 'woven-280', 1700, 'Inner ring'],
  ['12 in practice frame', 12, 2, 6, 'school', 'pet-250', 1800, 'Inner ring'],
]
const kettles: Row[] = [
  ['23 in kettle, hammered copper', 23, 0, 6, 'orchestra', 'pet-haze-200', 3300, 'Counterhoop, steel'],
  ['26 in kettle, hammered copper', 26, 0, 8, 'orchestra', 'pet-haze-200', 3250, 'Counterhoop, steel'],
  ['29 in kettle, hammered copper', 29, 0, 8, 'orchestra', 'pet-haze-200', 3150, 'Counterhoop, steel'],
  ['32 in kettle, hammered copper', 32, 0, 8, 'orchestra', 'pet-haze-200', 2900, 'Counterhoop, steel'],
  ['26 in kettle, fibreglass', 25.5, 0, 6, 'school', 'pet-haze-200', 3000, 'Counterhoop, steel'],
  ['29 in kettle, fibreglass', 28.5, 0, 8, 'school', 'pet-haze-200', 2850, 'Counterhoop, steel'],
]
const doubles: [Row, string, number][] = [
  [['12 in tom, maple shell', 12, 8, 6, 'studio', 'pet-250', 2500, 'Cast'], 'pet-188', 2200],
  [['13 in tom, maple shell', 13, 9, 6, 'studio', 'pet-250', 2500, 'Cast'], 'pet-188', 2250],
  [['16 in floor tom, maple shell', 16, 16, 8, 'studio', 'pet-250', 2400, 'Cast'], 'pet-188', 2100],
  [['14 in snare, beech shell', 14, 5.5, 10, 'studio', 'pet-250-frost', 4300, 'Cast'], 'pet-75', 1750],
  [['14 in snare, brass shell', 14, 6.5, 10, 'tomas', 'pet-250-frost', 4500, 'Flanged steel'], 'pet-75', 1800],
  [['20 in bass drum, poplar shell', 20, 16, 8, 'tomas', 'pet-250', 1300, 'Maple'], 'pet-250', 1200],
  [['24 in field bass drum', 24, 14, 10, 'band', 'pet-250', 1700, 'Maple'], 'pet-250', 1600],
  [['14 in field drum, ash shell', 14, 12, 10, 'band', 'woven-280', 4800, 'Ash'], 'pet-75', 1900],
  [['14 in field drum, second', 14, 12, 10, 'band', 'woven-280', 4700, 'Ash'], 'pet-75', 1850],
]
const fixtures: Row[] = [
  ['Proof fixture, 10 in ring', 10, 0, 8, null, 'pet-250', 2600, 'Fixture ring'],
  ['Proof fixture, 13 in ring', 13, 0, 8, null, 'pet-250', 2900, 'Fixture ring'],
  ['Proof fixture, 14 in ring', 14, 0, 8, null, 'pet-250-frost', 3200, 'Fixture ring'],
  ['Proof fixture, 16 in ring', 16, 0, 10, null, 'pet-2x188', 3300, 'Fixture ring'],
  ['Proof fixture, 22 in ring', 22, 0, 10, null, 'pet-250', 1900, 'Fixture ring'],
  ['Proof fixture, 26 in ring', 26, 0, 10, null, 'pet-188', 3000, 'Fixture ring'],
  ['Proof fixture, 12 in ring', 12, 0, 8, null, 'skin-calf', 3000, 'Fixture ring'],
]

export const demoDrums: DemoDrum[] = [
  ...open.map(drum('open')),
  ...frame.map(drum('frame')),
  ...kettles.map(kettle),
  ...doubles.map(([row, film, tension]) => twoHeads(row, film, tension)),
  ...fixtures.map(drum('fixture')),
]
