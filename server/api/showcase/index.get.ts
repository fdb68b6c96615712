export default defineRoute({ access: 'public', handler: async () => ({ reading: await findShowcase(useDb()) }) })
