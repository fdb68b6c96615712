import type { ReadingsPage } from '#shared/schemas/reading'
import type { HistoryQuery } from './useHistoryQuery'

/** The rows of the present view. Those of the view before stay until the new ones are there, so the page keeps its height. */
export async function useHistoryPage(query: Ref<HistoryQuery>) {
  const request = useRequestFetch()
  const { data, error, status, refresh } = await useAsyncData('histories', (_app, { signal }) => request<ReadingsPage>('/api/readings', { query: query.value, signal }), { watch: [query] })
  return { page: data, error, pending: computed(() => status.value === 'pending'), refresh }
}
