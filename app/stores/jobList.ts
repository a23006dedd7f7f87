import type { JobSummary } from '#shared/schemas/api'
import { askersSchema, bulkReplySchema, jobListSchema, type Asker, type BulkAction, type BulkResult } from '#shared/schemas/jobList'
import { DEFAULT_SORT, fits, writeListState, type ListState } from '~/utils/jobs/listState'

const PAGE = 50

/** The page of the list of jobs that is shown, and what is done to many of them. */
export const useJobListStore = defineStore('jobList', () => {
  const api = useApi()
  const session = useSessionStore()

  const state = ref<ListState>({})
  const jobs = ref<JobSummary[]>([])
  const next = ref<string | null>(null)
  const loaded = ref(false)
  /** Jobs that came in since and belong on an earlier page or in another place. */
  const missed = ref<ReadonlySet<string>>(new Set())
  const askers = ref<Asker[]>([])
  let asked = 0

  /** Reads the page that `wanted` names. Of several at once the last one counts. */
  async function load(wanted: ListState) {
    const turn = ++asked
    const page = await api.json('/api/jobs', jobListSchema, { query: { limit: PAGE, ...writeListState(wanted) } })
    if (turn !== asked) return
    state.value = wanted
    jobs.value = page.jobs
    next.value = page.next
    missed.value = new Set()
    loaded.value = true
  }

  async function loadAskers() {
    askers.value = (await api.json('/api/jobs/people', askersSchema)).people
  }

  /** After the event stream was away. */
  async function refresh() {
    if (loaded.value) await load(state.value)
  }

  /**
   * Does one thing to many jobs; each is answered for itself. `key` makes a repeated press or a lost reply harmless.
   * Throws a ProblemError when nothing was tried.
   */
  async function act(action: BulkAction, ids: readonly string[], key: string): Promise<BulkResult[]> {
    const { results } = await api.json('/api/jobs/bulk', bulkReplySchema, { method: 'POST', body: { ids, action }, headers: { 'Idempotency-Key': key } })
    await Promise.all([session.load(), refresh()])
    return results
  }

  /** Puts a changed job where it is shown. A new one goes on top of the newest; elsewhere it is counted, so that nothing jumps. */
  function apply(summaryAfter: (known: JobSummary | undefined) => JobSummary) {
    const news = summaryAfter(undefined)
    const at = jobs.value.findIndex(known => known.id === news.id)
    if (at >= 0) {
      jobs.value = jobs.value.with(at, summaryAfter(jobs.value[at]))
      return
    }
    if (!loaded.value || !fits(state.value, news)) return
    const { sort = DEFAULT_SORT, cursor } = state.value
    const isNewest = jobs.value.every(known => news.id > known.id)
    if (sort === DEFAULT_SORT && cursor === undefined && isNewest) jobs.value = [news, ...jobs.value]
    else if (isOpen(news)) missed.value = new Set([...missed.value, news.id])
  }

  function replace(change: (job: JobSummary) => JobSummary) {
    jobs.value = jobs.value.map(change)
  }

  function drop(id: string) {
    jobs.value = jobs.value.filter(job => job.id !== id)
    missed.value = new Set([...missed.value].filter(known => known !== id))
  }

  return { state, jobs, next, loaded, missed, askers, load, loadAskers, refresh, act, apply, replace, drop }
})
