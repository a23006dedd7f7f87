import type { Issue } from '~/utils/bench/draft'

/** Time a half-typed number is given before it is called wrong, ms. */
const GRACE_MS = 600

/** Faults as they are shown: mended ones vanish at once, new ones wait until typing pauses. */
export function useCalmIssues(issues: () => readonly Issue[]) {
  const shown = shallowRef<readonly Issue[]>(issues())
  const { start, stop } = useTimeoutFn(() => {
    shown.value = issues()
  }, GRACE_MS, { immediate: false })

  watch(issues, (now) => {
    const known = now.filter(issue => shown.value.some(old => old.path === issue.path && old.part === issue.part))
    shown.value = known
    stop()
    if (known.length < now.length) start()
  })
  return shown
}
