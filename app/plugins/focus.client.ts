/**
 * After a change of page the focus goes to the new page's main part, where reading begins, unless the page has put it
 * somewhere itself. A change of the address alone (filters, an opened part) leaves it where it is.
 */
export default defineNuxtPlugin((nuxtApp) => {
  const router = useRouter()
  let moved = false
  router.afterEach((to, from) => {
    moved ||= from.matched.length > 0 && to.path !== from.path
  })
  nuxtApp.hook('page:finish', () => {
    if (!moved) return
    moved = false
    void nextTick(() => {
      const main = document.getElementById('main')
      if (main && !(document.activeElement && main !== document.activeElement && main.contains(document.activeElement))) main.focus({ preventScroll: true })
    })
  })
})
