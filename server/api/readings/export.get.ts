import { readingsQuery } from '#shared/schemas/reading'

/** The filtered table as a CSV file; `limit`, `page` and `cursor` do not count here. */
export default defineRoute({
  access: ['owner', 'maker', 'staff'],
  query: readingsQuery,
  async handler({ event, user, query }) {
    const csv = await exportHistory(useDb(), query, user)
    // Whoever closes the page stops the reading of further rows.
    event.node.res.on('close', () => csv.destroy())
    setResponseHeaders(event, {
      'content-type': 'text/csv; charset=utf-8',
      'content-disposition': `attachment; filename="readings-${new Date().toISOString().slice(0, 10)}.csv"`,
      'cache-control': 'no-store',
    })
    return csv
  },
})
