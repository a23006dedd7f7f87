import { z } from 'zod'
import { jobDetailSchema, type JobDetail, type JobSummary, type StreamEvent } from '#shared/schemas/api'
import type { Answer } from '#shared/schemas/answer'
import type { JobSpec } from '#shared/schemas/job'
import { unpackArrays } from '#shared/utils/arrays'
import { trialsOf } from '~/utils/jobs/doneWords'

/** A job without its arrays: what the server renders and the page's payload may hold. */
export type JobHead = Omit<JobDetail, 'answer'> & { words: Answer['words'] | null, complete: boolean, trialsDone: number }

const headOf = ({ answer, ...rest }: JobDetail): JobHead => ({ ...rest, words: answer?.words ?? null, complete: answer?.complete ?? false, trialsDone: answer ? trialsOf(answer) : 0 })

/** The jobs that are open on a page, and everything that changes them and the list. */
export const useJobsStore = defineStore('jobs', () => {
  const api = useApi()
  const session = useSessionStore()

  const list = useJobListStore()

  const heads = ref<Record<string, JobHead>>({})
  /** Counts what the event stream told, so that an open page can read its job anew. */
  const told = ref(0)
  /** Answers with their arrays; in the browser alone. */
  const answers = shallowRef<Record<string, Answer>>({})

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
    list.drop(id)
    const { [id]: _, ...others } = heads.value
    heads.value = others
  }

  /** Puts a changed summary where it is shown. */
  function apply(news: TeamJob) {
    const after = (known: JobSummary | undefined) => summaryOf(news, known, session.me?.user.id)
    list.apply(after)
    const head = heads.value[news.id]
    if (head) heads.value = { ...heads.value, [news.id]: { ...head, ...after(head) } }
  }

  /** Puts what is newly said of waiting and ends where the jobs are shown. */
  function foresee(outlooks: readonly JobOutlook[]) {
    const byId = new Map(outlooks.map(outlook => [outlook.id, outlook]))
    list.replace(job => withOutlook(job, byId.get(job.id)))
    heads.value = Object.fromEntries(Object.entries(heads.value).map(([id, head]) => [id, withOutlook(head, byId.get(id))]))
  }

  function receive(event: StreamEvent) {
    if (event.type === 'outlook') return foresee(event.jobs)
    if (event.type === 'job') apply(event.job)
    else if (event.type === 'deleted') drop(event.jobId)
    told.value++
  }

  /** Whether anything that is shown may still change by itself. */
  const showsOpen = computed(() => list.jobs.some(isOpen) || Object.values(heads.value).some(isOpen))

  /** After the event stream was away: what is shown is read again. */
  async function refresh() {
    await list.refresh()
    await Promise.all(Object.values(heads.value).filter(head => head.state === 'queued' || head.state === 'running').map(head => load(head.id)))
  }

  return { heads, answers, told, load, loadPaths, submit, cancel, remove, receive, refresh, showsOpen }
})
