/* Hands the microphone's samples to the page in blocks of 1024, each with its place in time, so that a gap is noticed. */
const BLOCK = 1024

class TapRecorder extends AudioWorkletProcessor {
  constructor() {
    super()
    this.block = new Float32Array(BLOCK)
    this.filled = 0
    this.startFrame = 0
  }

  process(inputs) {
    const channel = inputs[0] && inputs[0][0]
    if (!channel) {
      // No sound came: what was begun is dropped, and the next block's place tells of the gap.
      this.filled = 0
      return true
    }
    let offset = 0
    while (offset < channel.length) {
      if (this.filled === 0) this.startFrame = currentFrame + offset
      const take = Math.min(channel.length - offset, BLOCK - this.filled)
      this.block.set(channel.subarray(offset, offset + take), this.filled)
      this.filled += take
      offset += take
      if (this.filled === BLOCK) {
        this.port.postMessage({ startFrame: this.startFrame, samples: this.block }, [this.block.buffer])
        this.block = new Float32Array(BLOCK)
        this.filled = 0
      }
    }
    return true
  }
}

registerProcessor('tap-recorder', TapRecorder)
