import type { InstrumentHistoryView, InstrumentView } from '#shared/schemas/instrument'

/** One instrument with its tuning history. */
export async function useInstrument(id: () => string) {
  const request = useRequestFetch()
  const { data, error, pending, refresh } = await useAsyncData(() => `instrument-${id()}`, async () => {
    const [instrument, history] = await Promise.all([
      request<InstrumentView>(`/api/instruments/${id()}`),
      request<InstrumentHistoryView>(`/api/instruments/${id()}/history`),
    ])
    return { instrument, history }
  }, { watch: [id] })
  return { instrument: computed(() => data.value?.instrument), history: computed(() => data.value?.history ?? { readings: [], turns: [] }), error, pending, refresh }
}
