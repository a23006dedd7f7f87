/** Everything but the sign-in page and pages with `meta.open` asks for a session; pages with `meta.admin` for the admin role as well. */
export default defineNuxtRouteMiddleware(async (to) => {
  const session = useSessionStore()
  if (!session.known) await session.load()

  if (to.path === '/signin') return session.me ? navigateTo(safeNext(to.query.next)) : undefined
  if (to.meta.open) return
  if (!session.me) return navigateTo({ path: '/signin', query: to.fullPath === '/' ? {} : { next: to.fullPath } })
  if (to.meta.admin && !session.isAdmin) {
    return abortNavigation(createError({ statusCode: 403, statusMessage: 'Your role does not allow this', fatal: true }))
  }
})
