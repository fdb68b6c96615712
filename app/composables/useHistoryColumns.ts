import { HIDDEN_AT_FIRST, type HistoryColumn, historyColumnNames } from '~/utils/historyColumns'

/** Which columns a person hides; in a cookie, so that the server draws the same table. */
export function useHistoryColumns() {
  const cookie = useCookie<HistoryColumn[]>('rimwright-history-hidden', { maxAge: 400 * 24 * 3600, sameSite: 'lax', path: '/', default: () => HIDDEN_AT_FIRST })
  const hidden = computed(() => {
    const names = Array.isArray(cookie.value) ? cookie.value : HIDDEN_AT_FIRST
    return historyColumnNames.filter(name => name !== 'instrument' && names.includes(name))
  })
  const isHidden = (name: HistoryColumn) => hidden.value.includes(name)
  function toggle(name: HistoryColumn) {
    cookie.value = isHidden(name) ? hidden.value.filter(other => other !== name) : [...hidden.value, name]
  }
  return { hidden, isHidden, toggle }
}
