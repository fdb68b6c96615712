import type { LineFindings } from './lines'
import type { AnalysedReading } from '../../../shared/types/reading'
import type { AnalysisRequest } from './types'

/** What matching needs of the request: all but the sound. A round is explained as edge taps at every rod together. */
export type ExplainRequest = Omit<AnalysisRequest, 'wav'>

/** What matching makes of a tap's lines; the rest of a reading comes from the taps themselves. */
export type Explanation = Omit<AnalysedReading, 'analysisVersion' | 'taps' | 'rim'>

/**
 * The step from lines to tension. Steady lines are in findings.lines, marked, and are no drum's: they go to `unexplained`
 * with a cause at most. Levels are relative to the strongest decaying line where listening began.
 */
export type ExplainLines = (findings: LineFindings, request: ExplainRequest) => Explanation
