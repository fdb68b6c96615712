import type { DesignDrum, DesignFilm, DesignRange, DesignTarget } from '#shared/utils/headDesign'
import type { AssessedHead } from '#shared/utils/headDesignWords'

export interface PredictionInput { drum: DesignDrum, film: DesignFilm, films: DesignFilm[], target: DesignTarget }
export interface PredictionRequest extends PredictionInput { number: number }
export type FilmRange = DesignRange & { filmId: string, name: string }
export interface PredictionAnswer { number: number, assessed: AssessedHead, ranges: FilmRange[] }

/** 80 ms: a little more than the pause between two keys, so that a typed number is reckoned once. */
const PAUSE_MS = 80

/**
 * What physics predicts of the head as it is entered, reckoned in a worker of this browser. The last answer stays while
 * the next is reckoned, and while what is entered is incomplete.
 */
export function useHeadPrediction(input: Ref<PredictionInput | null>) {
  const prediction = shallowRef<{ input: PredictionInput, assessed: AssessedHead, ranges: FilmRange[] } | null>(null)
  const busy = ref(false)
  const failed = ref(false)
  let worker: Worker | undefined
  let number = 0
  let asked: PredictionInput | null = null

  function ask(): void {
    if (!worker || !input.value) return
    // A plain copy: reactive objects do not cross to a worker.
    asked = JSON.parse(JSON.stringify(input.value)) as PredictionInput
    busy.value = true
    worker.postMessage({ ...asked, number: ++number } satisfies PredictionRequest)
  }

  onMounted(() => {
    worker = new Worker(new URL('./predictHead.worker.ts', import.meta.url), { type: 'module' })
    worker.addEventListener('message', ({ data }: MessageEvent<PredictionAnswer | { number: number, failed: string }>) => {
      if (data.number !== number || !asked) return
      busy.value = false
      failed.value = 'failed' in data
      if (!('failed' in data)) prediction.value = { input: asked, assessed: data.assessed, ranges: data.ranges }
    })
    worker.addEventListener('error', () => {
      busy.value = false
      failed.value = true
    })
    ask()
  })
  watchDebounced(input, ask, { debounce: PAUSE_MS, deep: true })
  onBeforeUnmount(() => worker?.terminate())
  return { prediction, busy, failed }
}
