import type { Role } from '#shared/schemas/common'

/** Comfort only: sends people to where they can go on. The server decides on every request. */
export default defineNuxtRouteMiddleware((to) => {
  const access = to.meta.access as 'signed-in' | Role[] | undefined
  if (!access) return
  const { user, session } = useUserSession()
  if (!user.value) return navigateTo({ name: 'sign-in', query: { to: to.fullPath, ...(session.value?.ended && { ended: '1' }) } })
  if (access !== 'signed-in' && !access.includes(user.value.role)) {
    return abortNavigation(createError({ statusCode: 403, statusMessage: 'Forbidden', message: 'Your role does not cover this page.' }))
  }
})
