/** Anything under /api that no route answers. */
export default defineRoute({
  access: 'public',
  handler: async () => {
    throw notFound('This address')
  },
})
