/** Quiet kept before the first tap, s: the analysis wants 0.3 s of it. */
const KEEP_BEFORE_S = 0.4
/** The noise of the room is listened to for this long before a tap may start the recording, s. */
const LISTEN_S = 0.3
/** A tap stands this many times above the room. */
const TAP_OVER_NOISE = 8
/** Softest peak that counts as a tap, of full scale: -34 dBFS. */
const SOFTEST_TAP = 0.02
/** Two taps of a round are never closer, s. */
const BETWEEN_TAPS_S = 0.35
/** A ring is over when it has fallen this far below its tap (60 dB is what T60 asks; rooms seldom allow more than 45). */
const RING_OVER = 10 ** (-45 / 20)
/** And has stayed there, s. */
const STAYS_S = 0.4
/** Shortest and longest ring kept after the last tap, s. */
const SHORTEST_S = 1.5
const LONGEST_S = 5
/** A recording is at most two minutes. */
const TOO_LONG_S = 120

export interface TapGateOptions { sampleRateHz: number, taps: number }

/** Starts keeping sound at the first tap, with a little quiet before it, and knows when the last tap has rung out. */
export class TapGate {
  taps = 0
  /** Peak of the newest block, of full scale. */
  level = 0
  clipped = false
  state: 'listening' | 'keeping' | 'complete' = 'listening'
  private readonly blocks: Float32Array[] = []
  private heldFrames = 0
  private heard = 0
  private noise = 0
  private lastTapFrame = 0
  private tapPeak = 0
  private envelope = 0
  private quietSince: number | null = null

  constructor(private readonly options: TapGateOptions) {}

  push(block: Float32Array): void {
    if (this.state === 'complete') return
    this.level = block.reduce((most, value) => Math.max(most, Math.abs(value)), 0)
    this.blocks.push(block)
    this.heldFrames += block.length
    this.heard += block.length
    const listened = this.heard > LISTEN_S * this.options.sampleRateHz
    if (listened && this.isTap()) this.startTap()
    else if (this.state === 'listening') this.noise = this.noise === 0 ? this.level : this.noise * 0.9 + this.level * 0.1
    this.envelope = Math.max(this.level, this.envelope * 0.8)
    if (this.state === 'listening') this.dropOld()
    else this.watchRing()
  }

  private isTap(): boolean {
    const since = this.heard - this.lastTapFrame
    const apart = this.taps === 0 || since > BETWEEN_TAPS_S * this.options.sampleRateHz
    return apart && this.level > Math.max(SOFTEST_TAP, this.noise * TAP_OVER_NOISE) && this.level > 2.5 * this.envelope
  }

  private startTap(): void {
    this.state = 'keeping'
    this.taps++
    this.lastTapFrame = this.heard
    this.tapPeak = this.level
    this.quietSince = null
  }

  private dropOld(): void {
    const keep = KEEP_BEFORE_S * this.options.sampleRateHz
    while (this.blocks.length > 1 && this.heldFrames - this.blocks[0]!.length >= keep) this.heldFrames -= this.blocks.shift()!.length
  }

  private watchRing(): void {
    const { sampleRateHz, taps } = this.options
    if (this.level >= 0.99) this.clipped = true
    this.tapPeak = Math.max(this.tapPeak, this.level)
    const sinceTapS = (this.heard - this.lastTapFrame) / sampleRateHz
    if (this.level < Math.max(this.tapPeak * RING_OVER, this.noise * 1.5)) this.quietSince ??= this.heard
    else this.quietSince = null
    const quietS = this.quietSince === null ? 0 : (this.heard - this.quietSince) / sampleRateHz
    const over = sinceTapS >= LONGEST_S || (sinceTapS >= SHORTEST_S && quietS >= STAYS_S)
    if ((this.taps >= taps && over) || this.heldFrames > TOO_LONG_S * sampleRateHz) this.state = 'complete'
  }

  /** Everything kept, in one piece. */
  samples(): Float32Array {
    const whole = new Float32Array(this.heldFrames)
    let at = 0
    for (const block of this.blocks) {
      whole.set(block, at)
      at += block.length
    }
    return whole
  }
}
