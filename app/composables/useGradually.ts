/**
 * How many of a list are drawn so far: none until `ready`, then `batch` more in every idle moment, so that the page answers
 * meanwhile. Begins anew when the list changes.
 */
export function useGradually(list: () => readonly unknown[], ready: () => boolean, batch: () => number) {
  const drawn = ref(0)
  let handle = 0
  const soon = (act: () => void) => 'requestIdleCallback' in window ? window.requestIdleCallback(act, { timeout: 1_000 }) : Number(setTimeout(act, 60))
  const never = (id: number) => 'cancelIdleCallback' in window ? window.cancelIdleCallback(id) : clearTimeout(id)

  function more() {
    drawn.value = Math.min(list().length, drawn.value + batch())
    if (drawn.value < list().length) handle = soon(more)
  }
  onMounted(() => {
    watch([list, ready], ([, isReady]) => {
      never(handle)
      drawn.value = 0
      if (isReady && list().length > 0) handle = soon(more)
    }, { immediate: true })
  })
  onBeforeUnmount(() => import.meta.client && never(handle))
  return drawn
}
