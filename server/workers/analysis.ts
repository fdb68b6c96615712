import { analyseRecording } from '../utils/analysis/analyse'
import type { AnalysisOutcome, AnalysisRequest } from '../utils/analysis/types'
import { warmUp } from './warmUp'

/** Entry of an analysis thread: one recording in, one outcome out. Bundled on its own (build/node-worker-plugin.ts). */
export default function analyse(request: AnalysisRequest): AnalysisOutcome {
  return analyseRecording(request)
}

warmUp()
