import { analyseRecording } from '../../server/utils/analysis/analyse'
import type { AnalysisRequest } from '../../server/utils/analysis/types'

const WARM = 5
const RUNS = 20

/** Median time of each step of the analysis, ms, and its share of the whole; warm. */
export function benchSteps(request: AnalysisRequest): Record<string, { ms: number, share: string }> {
  const runs: Record<string, number>[] = []
  for (let i = 0; i < WARM + RUNS; i++) {
    const start = performance.now()
    const { timingsMs } = analyseRecording(request)
    if (i >= WARM) runs.push({ ...timingsMs, whole: performance.now() - start })
  }
  const median = (step: string) => runs.map(run => run[step] ?? 0).sort((a, b) => a - b)[RUNS >> 1]!
  const whole = median('whole')
  return Object.fromEntries(Object.keys(runs[0]!).map(step => [step, { ms: Math.round(10 * median(step)) / 10, share: `${Math.round(100 * median(step) / whole)} %` }]))
}
