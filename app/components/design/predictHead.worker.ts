import { assessHead } from '#shared/utils/headDesignWords'
import { createHeadDesign, toneOf } from '#shared/utils/headDesign'
import type { PredictionAnswer, PredictionRequest } from './headPrediction'

/** Tables of the air take a tenth of a second for a new drum: off the main thread, so that typing never waits. */
let ranges: { key: string, items: PredictionAnswer['ranges'] } | undefined

addEventListener('message', ({ data }: MessageEvent<PredictionRequest>) => {
  const { number, drum, film, films, target } = data
  try {
    const tone = toneOf(target)
    const assessed = assessHead(drum, film, films, target)
    const key = JSON.stringify([drum, tone])
    if (ranges?.key !== key) ranges = { key, items: films.map(one => ({ filmId: one.id, name: one.name, ...createHeadDesign(drum, one, tone).range() })) }
    postMessage({ number, assessed, ranges: ranges.items } satisfies PredictionAnswer)
  } catch (error) {
    postMessage({ number, failed: error instanceof Error ? error.message : String(error) })
  }
})
