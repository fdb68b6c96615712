import type { ReadingView } from '#shared/schemas/reading'
import type { TurnSheetView } from '#shared/schemas/turnSheet'

/** A turn sheet with the reading it starts from. */
export async function useTurnSheet(id: () => string) {
  const request = useRequestFetch()
  const { data, error, pending, refresh } = await useAsyncData(() => `turn-sheet-${id()}`, async () => {
    const sheet = await request<TurnSheetView>(`/api/turn-sheets/${id()}`)
    return { sheet, reading: await request<ReadingView>(`/api/readings/${sheet.readingId}`) }
  }, { watch: [id] })
  return { sheet: computed(() => data.value?.sheet), reading: computed(() => data.value?.reading), error, pending, refresh }
}
