import type { PeoplePage } from '#shared/schemas/people'
import type { Role } from '#shared/schemas/common'

/** People by search and role, one page after the other. */
export async function usePeople(q: Ref<string>, role: Ref<Role | ''>) {
  const wanted = refDebounced(q, 250)
  const query = computed(() => ({ q: wanted.value.trim() || undefined, role: role.value || undefined, limit: 50 }))
  const request = useRequestFetch()
  const { data, error, status, refresh } = await useAsyncData('people', () => request<PeoplePage>('/api/people', { query: query.value }), { watch: [query] })
  const more = useAction(async (cursor: string) => {
    const page = await $fetch<PeoplePage>('/api/people', { query: { ...query.value, cursor } })
    if (data.value) data.value = { ...page, items: [...data.value.items, ...page.items] }
  })
  return { page: data, error, pending: computed(() => status.value === 'pending'), refresh, more }
}
