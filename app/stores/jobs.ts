import { z } from 'zod'
import { jobDetailSchema, type JobDetail, type JobSummary, type StreamEvent } from '#shared/schemas/api'
import { jobListSchema } from '#shared/schemas/jobList'
import type { Answer } from '#shared/schemas/answer'
import type { JobSpec } from '#shared/schemas/job'
import { unpackArrays } from '#shared/utils/arrays'

/** A job without its arrays: what the server renders and the page's payload may hold. */
export type JobHead = Omit<JobDetail, 'answer'> & { words: Answer['words'] | null, complete: boolean }

const PAGE = 50

const headOf = ({ answer, ...rest }: JobDetail): JobHead => ({ ...rest, words: answer?.words ?? null, complete: answer?.complete ?? false })

/** The team's jobs: pages of the list, the jobs that are open, and everything that changes them. */
export const useJobsStore = defineStore('jobs', () => {
  const api = useApi()
  const session = useSessionStore()

  const list = ref<JobSummary[]>([])
  const next = ref<string | null>(null)
  const listed = ref(false)
  const heads = ref<Record<string, JobHead>>({})
  /** Counts what the event stream told, so that an open page can read its job anew. */
  const told = ref(0)
  /** Answers with their arrays; in the browser alone. */
  const answers = shallowRef<Record<string, Answer>>({})

  async function loadFirst() {
    const page = await api.json('/api/jobs', jobListSchema, { query: { limit: PAGE } })
    list.value = page.jobs
    next.value = page.next
    listed.value = true
  }

  async function loadMore() {
    if (next.value === null) return
    const page = await api.json('/api/jobs', jobListSchema, { query: { limit: PAGE, cursor: next.value } })
    const seen = new Set(list.value.map(job => job.id))
    list.value = [...list.value, ...page.jobs.filter(job => !seen.has(job.id))]
    next.value = page.next
  }

  function keep(job: JobDetail) {
    heads.value = { ...heads.value, [job.id]: headOf(job) }
    if (import.meta.client) {
      const { [job.id]: _, ...others } = answers.value
      answers.value = job.answer ? { ...others, [job.id]: job.answer } : others
    }
    return job
  }

  /** Reads one job with its answer so far. Throws a ProblemError (404: not there or not yours to see). */
  const load = async (id: string) => keep(await api.json(`/api/jobs/${id}`, jobDetailSchema))

  /** Float32 x, y, z of every sample of every kept path; null while no part of the job is done. */
  async function loadPaths(id: string): Promise<Float32Array | null> {
    try {
      const { paths } = unpackArrays(await api.bytes(`/api/jobs/${id}/paths`)).arrays
      return paths instanceof Float32Array ? paths : null
    }
    catch (error) {
      if (error instanceof ProblemError && error.status === 409) return null
      throw error
    }
  }

  /**
   * Queues a job, made from a version of a preset where one is pinned. The same `key` for the same intent makes a repeated press or a lost reply harmless.
   * Throws a ProblemError: 422 with pointers into the specification, or with the price where quota or cap refuse it.
   */
  async function submit(spec: JobSpec, key: string, pin: { id: string, version: number } | null = null) {
    const job = keep(await api.json('/api/jobs', jobDetailSchema, { method: 'POST', body: spec, query: { preset: pin?.id, version: pin?.version }, headers: { 'Idempotency-Key': key } }))
    await session.load()
    return job
  }

  async function cancel(id: string) {
    const job = keep(await api.json(`/api/jobs/${id}/cancel`, jobDetailSchema, { method: 'POST' }))
    apply(job)
  }

  async function remove(id: string) {
    await api.json(`/api/jobs/${id}`, z.unknown(), { method: 'DELETE' })
    drop(id)
  }

  function drop(id: string) {
    list.value = list.value.filter(job => job.id !== id)
    const { [id]: _, ...others } = heads.value
    heads.value = others
  }

  /** Puts a changed summary where it is shown; a job that the list does not know yet goes on top. */
  function apply(news: TeamJob) {
    const at = list.value.findIndex(known => known.id === news.id)
    const head = heads.value[news.id]
    const summary = summaryOf(news, list.value[at] ?? head, session.me?.user.id)
    if (at >= 0) list.value = list.value.with(at, summary)
    else if (listed.value && (list.value.length === 0 || news.id > list.value[0]!.id)) list.value = [summary, ...list.value]
    if (head) heads.value = { ...heads.value, [news.id]: { ...head, ...summary } }
  }

  /** Puts what is newly said of waiting and ends where the jobs are shown. */
  function foresee(outlooks: readonly JobOutlook[]) {
    const byId = new Map(outlooks.map(outlook => [outlook.id, outlook]))
    list.value = list.value.map(job => withOutlook(job, byId.get(job.id)))
    heads.value = Object.fromEntries(Object.entries(heads.value).map(([id, head]) => [id, withOutlook(head, byId.get(id))]))
  }

  function receive(event: StreamEvent) {
    if (event.type === 'outlook') return foresee(event.jobs)
    if (event.type === 'job') apply(event.job)
    else if (event.type === 'deleted') drop(event.jobId)
    told.value++
  }

  /** Whether anything that is shown may still change by itself. */
  const showsOpen = computed(() => list.value.some(isOpen) || Object.values(heads.value).some(isOpen))

  /** After the event stream was away: what is shown is read again. */
  async function refresh() {
    if (listed.value) await loadFirst()
    await Promise.all(Object.values(heads.value).filter(head => head.state === 'queued' || head.state === 'running').map(head => load(head.id)))
  }

  return { list, next, listed, heads, answers, told, loadFirst, loadMore, load, loadPaths, submit, cancel, remove, receive, refresh, showsOpen }
})
