export default defineRoute({
  access: ['owner', 'maker', 'staff'],
  handler: () => listReadingMakers(useDb()),
})
