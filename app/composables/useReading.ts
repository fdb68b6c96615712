import type { InstrumentHistoryView, InstrumentView } from '#shared/schemas/instrument'
import type { ReadingView } from '#shared/schemas/reading'

/** One reading, the film it was read on, and the earlier readings of its head, newest first: those it can be brought back to. */
export async function useReading(id: () => string) {
  const request = useRequestFetch()
  const { data, error, pending, refresh } = await useAsyncData(() => `reading-${id()}`, async () => {
    const reading = await request<ReadingView>(`/api/readings/${id()}`)
    const [instrument, history] = await Promise.all([
      request<InstrumentView>(`/api/instruments/${reading.instrumentId}`),
      request<InstrumentHistoryView>(`/api/instruments/${reading.instrumentId}/history`),
    ])
    const earlier = history.readings
      .filter(one => one.headId === reading.headId && one.id !== reading.id && one.takenAt < reading.takenAt)
      .reverse()
      .map(one => ({ id: one.id, takenAt: one.takenAt, tensionNPerM: one.tension.nPerM, fundamentalHz: one.fundamentalHz }))
    return { reading, earlier, film: instrument.heads.find(head => head.id === reading.headId)?.film ?? null }
  }, { watch: [id] })
  return {
    reading: computed(() => data.value?.reading),
    film: computed(() => data.value?.film ?? null),
    earlier: computed(() => data.value?.earlier ?? []),
    error, pending, refresh,
  }
}
