import { bringsPaths } from '#shared/schemas/answer'

/**
 * One job while its page is open: the head at once (also on the server), the answer with its arrays in the browser, the paths when
 * there are any, and all of it anew as the event stream tells of progress.
 */
export function useJobPage(id: string) {
  const jobs = useJobsStore()

  const job = computed(() => jobs.heads[id] ?? null)
  const answer = computed(() => jobs.answers[id] ?? null)
  const paths = shallowRef<Float32Array | null>(null)

  const reload = async () => {
    if (jobs.heads[id]) await jobs.load(id)
  }
  const reloadSoon = useThrottleFn(reload, 2_000, true)

  onMounted(async () => {
    if (!answer.value && job.value?.words) await reload()
  })
  watch(() => jobs.told, () => {
    if (job.value && isOpen(job.value)) void reloadSoon()
  })
  watch(() => job.value?.state, (state, before) => {
    if (before && state && !isOpen({ state })) void reload()
  })
  if (import.meta.client) {
    watch(() => bringsPaths(answer.value) && `${answer.value.paths.paths}/${answer.value.complete}`, async (stage) => {
      if (stage) paths.value = await jobs.loadPaths(id)
    }, { immediate: true })
  }
  return { job, answer, paths }
}
