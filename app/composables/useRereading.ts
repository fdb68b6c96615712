import type { RereadingBody, RereadingView } from '#shared/schemas/rereading'

/** How often a page that shows progress asks for it, ms. */
const ASK_MS = 1500

/** Old recordings and the run that reads them again; asks for progress while one is under way and the page is looked at. */
export async function useRereading() {
  const { data, error, pending, refresh } = await useFetch<RereadingView>('/api/rereading')
  const visible = useDocumentVisibility()
  const { pause, resume } = useIntervalFn(() => visible.value === 'visible' && refresh(), ASK_MS, { immediate: false })
  watch(() => data.value?.run?.state, state => state === 'running' && import.meta.client ? resume() : pause(), { immediate: true })
  async function post(path: string, body?: RereadingBody) {
    data.value = await $fetch<RereadingView>(path, { method: 'POST', body })
  }
  return {
    rereading: computed(() => data.value), error, pending, refresh,
    start: useAction(() => post('/api/rereading', { version: data.value!.version })),
    cancel: useAction((id: string) => post(`/api/rereading/${id}/cancel`)),
  }
}
