import type { BothHeadsReading, HeadCalibration } from '../../shared/types/reading'
import { analyseRecording } from '../utils/analysis/analyse'
import { readBothHeads, type TappedReading } from '../utils/analysis/matchingBoth'
import { calibrate, type KnownTension } from '../utils/analysis/matchingCalibration'
import type { AnalysedInstrument, AnalysisOutcome, AnalysisRequest } from '../utils/analysis/types'
import { lowerPriority } from './lowPriority'
import { warmUp } from './warmUp'

/** Entry of an analysis thread: one recording in, one outcome out. Bundled on its own (build/node-worker-plugin.ts). */
export default function analyse(request: AnalysisRequest): AnalysisOutcome {
  return analyseRecording(request)
}

/** Both heads from stored readings: seconds of fitting that the server's own thread must not spend. */
export function readBoth({ instrument, taps }: { instrument: AnalysedInstrument, taps: TappedReading[] }): BothHeadsReading {
  return readBothHeads(instrument, taps)
}

export function calibrateHead(known: KnownTension): HeadCalibration {
  return calibrate(known)
}

lowerPriority()
warmUp()
