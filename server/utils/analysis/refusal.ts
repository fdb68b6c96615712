import type { Refusal, RefusalCode } from '../../../shared/types/reading'

/** Thrown by any step of the analysis that finds that no reading can be had; analyseRecording turns it into an answer. */
export class RefusalError extends Error {
  readonly code: RefusalCode

  constructor(code: RefusalCode, message: string) {
    super(message)
    this.name = 'RefusalError'
    this.code = code
  }

  toRefusal(): Refusal {
    return { code: this.code, message: this.message }
  }
}
