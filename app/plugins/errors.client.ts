/**
 * The one handler of what nobody caught: refusals of the API become a calm notice, the end of a session leads to the sign-in page,
 * anything else is a fault of ours and is said as such and left in the console.
 */
export default defineNuxtPlugin((nuxtApp) => {
  const handle = (error: unknown) => {
    const notices = useNoticesStore()
    if (!(error instanceof ProblemError)) {
      notices.say('Something in this page went wrong. Reload it; nothing you queued is lost.', 'warn')
      console.error(error)
      return
    }
    if (error.status === 401) {
      const session = useSessionStore()
      session.forget()
      const route = useRouter().currentRoute.value
      if (route.path !== '/signin') void navigateTo({ path: '/signin', query: { next: route.fullPath } })
      return
    }
    notices.say(error.message, 'warn')
  }

  nuxtApp.vueApp.config.errorHandler = error => void nuxtApp.runWithContext(() => handle(error))
  window.addEventListener('unhandledrejection', (event) => {
    if (!(event.reason instanceof ProblemError)) return
    event.preventDefault()
    void nuxtApp.runWithContext(() => handle(event.reason))
  })
})
