/**
 * The token that the page's link carried; undefined until the page lives, null when there is none. Taken out of the address at
 * once, so that neither the history nor somebody looking on keeps it.
 */
export function useLinkToken() {
  const token = ref<string | null>()
  onMounted(() => {
    token.value = linkToken(window.location.hash)
    if (window.location.hash) window.history.replaceState(window.history.state, '', window.location.pathname)
  })
  return token
}
