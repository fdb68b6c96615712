export default defineRoute({ access: 'public', handler: () => checkHealth() })
