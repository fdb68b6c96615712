import { encodeWav } from '~/utils/wavFile'
import { TapGate } from '~/utils/tapGate'

export type RecorderState = 'idle' | 'asking' | 'listening' | 'keeping'

const TROUBLE: Record<string, string> = {
  NotAllowedError: 'The browser does not let this page use the microphone. Allow it in the address bar and try again.',
  NotFoundError: 'No microphone was found. Connect one and try again.',
  NotReadableError: 'Another program holds the microphone. Close it and try again.',
}

/**
 * Records taps from the microphone with nothing in the way that would colour the sound. What it hands over is complete:
 * a gap, a lost microphone or a sleeping page throws the take away and says so.
 */
export function useRecorder(taps: () => number, onComplete: (wav: Blob) => void) {
  const state = ref<RecorderState>('idle')
  const level = ref(0)
  const heard = ref(0)
  const clipped = ref(false)
  const problem = ref('')
  let context: AudioContext | null = null
  let stream: MediaStream | null = null
  let gate: TapGate | null = null
  let expectedFrame: number | null = null

  function close() {
    stream?.getTracks().forEach(track => track.stop())
    void context?.close()
    context = null
    stream = null
    gate = null
    state.value = 'idle'
    level.value = 0
  }
  function spoil(why: string) {
    if (state.value === 'idle') return
    close()
    problem.value = why
  }

  async function finish() {
    if (!gate || !context) return
    const { taps: count } = gate
    const samples = gate.samples()
    const rate = context.sampleRate
    close()
    if (count === 0) {
      problem.value = 'No tap was heard, so nothing was kept. Tap a little harder or bring the microphone closer.'
      return
    }
    let wav: Blob
    try {
      wav = await encodeWav([samples], rate)
    } catch {
      problem.value = 'The take could not be turned into a WAV and was thrown away. Reload the page and record again.'
      return
    }
    onComplete(wav)
  }

  function take({ startFrame, samples }: { startFrame: number, samples: Float32Array }) {
    if (!gate) return
    if (expectedFrame !== null && startFrame !== expectedFrame) {
      if (gate.state === 'keeping') return spoil('The sound had a gap, so the take was thrown away. Close other programs and record again.')
      // Nothing is kept yet: listening starts over behind the gap.
      gate = new TapGate({ sampleRateHz: context!.sampleRate, taps: taps() })
    }
    expectedFrame = startFrame + samples.length
    gate.push(samples)
    level.value = Math.max(gate.level, level.value * 0.9)
    heard.value = gate.taps
    clipped.value = gate.clipped
    if (gate.state === 'keeping') state.value = 'keeping'
    if (gate.state === 'complete') void finish()
  }

  async function start() {
    if (state.value !== 'idle') return
    problem.value = ''
    heard.value = 0
    clipped.value = false
    expectedFrame = null
    state.value = 'asking'
    try {
      if (!navigator.mediaDevices) throw new DOMException('', 'InsecureContext')
      stream = await navigator.mediaDevices.getUserMedia({ audio: { echoCancellation: false, noiseSuppression: false, autoGainControl: false, channelCount: 1 } })
      context = new AudioContext()
      await context.audioWorklet.addModule('/worklets/tap-recorder.js')
      const node = new AudioWorkletNode(context, 'tap-recorder', { numberOfOutputs: 0 })
      gate = new TapGate({ sampleRateHz: context.sampleRate, taps: taps() })
      node.port.onmessage = event => take(event.data as { startFrame: number, samples: Float32Array })
      stream.getAudioTracks()[0]!.onended = () => spoil('The microphone was disconnected, so the take was thrown away. Record again.')
      context.createMediaStreamSource(stream).connect(node)
      if (context.state === 'suspended') await context.resume()
      state.value = 'listening'
    } catch (error) {
      close()
      problem.value = TROUBLE[error instanceof DOMException ? error.name : ''] ?? 'This browser cannot record here. Record with another program and drop the file.'
    }
  }
  const cancel = () => close()
  watch(useDocumentVisibility(), (now) => {
    if (now === 'hidden') spoil('The page went to sleep while recording, so the take was thrown away. Keep it in front.')
  })
  onBeforeUnmount(close)
  return { state, level, heard, clipped, problem, start, finish, cancel }
}
