import type { InstrumentsPage } from '#shared/schemas/instrument'

/** Instruments by search, one page after the other. What was found stays while the next search runs. */
export async function useInstrumentList(q: Ref<string>, limit = 50) {
  const wanted = refDebounced(q, 250)
  const { data, error, status, refresh } = await useFetch<InstrumentsPage>('/api/instruments', { query: { q: computed(() => wanted.value.trim() || undefined), limit }, key: `instruments-${limit}` })
  const more = useAction(async (cursor: string) => {
    const page = await $fetch<InstrumentsPage>('/api/instruments', { query: { q: wanted.value.trim() || undefined, limit, cursor } })
    if (data.value) data.value = { ...page, items: [...data.value.items, ...page.items] }
  })
  return { page: data, error, pending: computed(() => status.value === 'pending'), refresh, more }
}
