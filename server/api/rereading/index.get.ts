export default defineRoute({
  access: ['owner', 'maker', 'staff'],
  handler: () => getRereading(useDb()),
})
