import type { LocationQueryRaw } from 'vue-router'
import { readingsQuery } from '#shared/schemas/reading'

export const historyFilterNames = ['construction', 'side', 'takenBy', 'doubtful', 'from', 'to', 'minTension', 'maxTension', 'minHz', 'maxHz', 'customerId', 'instrumentId', 'headId'] as const
export type HistoryFilterName = typeof historyFilterNames[number]
const names = [...historyFilterNames, 'q', 'sort', 'limit', 'cursor'] as const
export type HistoryQuery = Partial<Record<typeof names[number], string>>

/** The address of the page is the state of the table, so that a view can be kept, sent and gone back to. */
export function useHistoryQuery() {
  const route = useRoute()
  const router = useRouter()

  /** What of the address the API takes; the rest is left out, not argued about. */
  const query = computed<HistoryQuery>(() => Object.fromEntries(names.flatMap((name) => {
    const text = route.query[name]
    return typeof text === 'string' && text && readingsQuery.shape[name].safeParse(text).success ? [[name, text]] : []
  })))

  /** Changes part of the view. A place in the list belongs to one order and one filter, so it goes unless it is what changes. */
  function change(patch: HistoryQuery, how: 'push' | 'replace' = 'push') {
    const next: LocationQueryRaw = { ...query.value, cursor: undefined, ...patch }
    for (const [name, value] of Object.entries(next)) if (!value) Reflect.deleteProperty(next, name)
    return router[how]({ name: 'histories', query: next })
  }

  const active = computed(() => historyFilterNames.filter(name => query.value[name] !== undefined))
  const clear = () => change(Object.fromEntries([...historyFilterNames, 'q'].map(name => [name, undefined])))
  return { query, active, change, clear }
}
