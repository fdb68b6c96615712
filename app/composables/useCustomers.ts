import type { PeoplePage } from '#shared/schemas/people'

/** Customers that an instrument can belong to, for the people at the bench; a customer's instruments are always their own. */
export async function useCustomers() {
  const { user } = useUserSession()
  const atBench = user.value?.role === 'owner' || user.value?.role === 'maker'
  const { data } = await useFetch<PeoplePage>('/api/people', { query: { role: 'customer', limit: 200 }, immediate: atBench, key: 'customers' })
  return computed(() => (data.value?.items ?? []).map(person => ({ value: person.id, label: `${person.name}, ${person.email}` })))
}
