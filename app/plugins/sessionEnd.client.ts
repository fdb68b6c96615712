/**
 * A session can end from elsewhere (signed out everywhere, a new password, a new role). The first refused request then
 * asks again who is signed in; if nobody is, the page gives way to the sign-in page, which says so and leads back.
 */
export default defineNuxtPlugin(() => {
  const { loggedIn, session, fetch: refresh } = useUserSession()
  const router = useRouter()
  const route = () => router.currentRoute.value

  const plain = globalThis.$fetch
  globalThis.$fetch = plain.create({
    async onResponseError({ request, response }) {
      if (response.status === 401 && loggedIn.value && !String(request).includes('/api/auth/')) await refresh()
    },
  }) as typeof plain

  watch(loggedIn, (now, before) => {
    if (before && !now && session.value?.ended && route().meta.access) {
      void navigateTo({ name: 'sign-in', query: { to: route().fullPath, ended: '1' } })
    }
  })
})
