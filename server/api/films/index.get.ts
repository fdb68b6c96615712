export default defineRoute({ access: 'public', handler: () => listFilms(useDb()) })
