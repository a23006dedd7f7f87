/** Keeps the draft in the browser while the calling page lives: a moment after each change, and at once when the page goes away. */
export function useDraftKeeping() {
  const draft = useDraftStore()
  let changed = false
  const keep = () => {
    if (changed) draft.keep()
    changed = false
  }
  const keepSoon = useDebounceFn(keep, 200)
  watch(() => [draft.draft, draft.origin], () => {
    if (import.meta.server) return
    changed = true
    void keepSoon()
  }, { deep: true })
  useEventListener('pagehide', keep)
  onBeforeUnmount(keep)
}
