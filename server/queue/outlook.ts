import type { WaitReason } from '#shared/schemas/waiting'
import { afterServing, nextContender } from './fairness'

// What is to be said of jobs that wait and run, from one picture of the queue. Nothing here reads a clock or a table.

/** A job that has not ended. CPU microseconds. */
export interface OpenJob {
  id: string
  userId: string
  queued: boolean
  /** Price of one chunk. */
  chunkMicros: number
  /** Chunks that nobody has been handed yet. */
  ready: number
  done: number
  /** CPU time used by the chunks that are done. */
  doneMicros: number
}

/** A chunk on its way to a worker or in its hands. */
export interface Flying {
  jobId: string
  running: boolean
  priceMicros: number
  /** 0 to 1 */
  progress: number
  /** Since its start; 0 while on its way. */
  elapsedSeconds: number
}

/** How chunks have gone of late, in natural logarithms. */
export interface Pace {
  /** Mean of CPU time over price, and how much jobs and chunks scatter about it. */
  use: { mean: number, sd: number }
  /** Mean of time on the clock over CPU time. */
  stretch: { mean: number, sd: number }
}

/** Bounds in units of a prediction's spread that held four of five past ends about as far away; median in seconds. */
export type BoundsAt = (median: number) => readonly [number, number]
/** For jobs that wait and for those that run. */
export interface Bounds { queued: BoundsAt, running: BoundsAt }

export interface Snapshot {
  slots: number
  /** The queue is being mended: free slots get no work at the moment. */
  mending: boolean
  /** Virtual time that the fair order has reached. */
  virtualNow: number
  virtualTimes: ReadonlyMap<string, number>
  /** In the order in which they were asked. */
  jobs: readonly OpenJob[]
  flying: readonly Flying[]
  pace: Pace
  bounds: Bounds
}

export interface Prediction {
  /** Seconds from now to the end. */
  median: number
  /** Standard deviation of ln(seconds + 1), before past errors correct it. */
  spread: number
  low: number
  high: number
}

export interface Outlook {
  waiting: { reason: WaitReason, jobsBefore: number, ownBefore: number, cpuMicrosBefore: number } | null
  prediction: Prediction | null
}

/** Seconds between two chunks on one slot, and from the last chunk to the stored answer. */
const GAP = 0.05
const MERGING = 0.4
/** Work handed out in the rehearsal; of more chunks, several count as one. */
const MOST_STEPS = 4000
/** What is not known better: of other jobs than those seen, of the machine's load, of what others will ask meanwhile. */
const LEAST_JOB_SPREAD = 0.12
const LOAD_SPREAD = 0.08
const ARRIVALS_SPREAD = 0.2

/** What there is to say of every open job, by id. */
export function outlooks(snapshot: Snapshot): Map<string, Outlook> {
  const rehearsed = snapshot.slots > 0 ? rehearse(snapshot) : null
  const own = new Map<string, number>()
  const said = new Map<string, Outlook>()
  for (const job of snapshot.jobs) {
    const course = rehearsed?.get(job.id)
    const ownBefore = own.get(job.userId) ?? 0
    if (job.ready > 0) own.set(job.userId, ownBefore + 1)
    said.set(job.id, {
      waiting: job.queued ? waitingOf(snapshot, job, course, ownBefore) : null,
      prediction: course && !snapshot.mending ? predict(snapshot, job, course) : null,
    })
  }
  return said
}

/** How one job fares in the rehearsal. */
interface Course { start: number | null, end: number, jobsBefore: number, microsBefore: number, othersServed: boolean }

function waitingOf({ slots, mending, jobs }: Snapshot, job: OpenJob, course: Course | undefined, ownBefore: number): Outlook['waiting'] {
  if (!course) {
    const before = jobs.filter(({ id }) => id < job.id)
    const cpuMicrosBefore = before.reduce((sum, { ready, chunkMicros }) => sum + ready * chunkMicros, 0)
    return { reason: slots === 0 ? 'noWorkers' : 'busy', jobsBefore: before.length, ownBefore, cpuMicrosBefore }
  }
  const { start, jobsBefore, microsBefore, othersServed } = course
  const isNow = start === null || start <= GAP
  const reason = mending ? 'mending' : isNow ? 'starting' : ownBefore > 0 ? 'own' : othersServed ? 'share' : 'busy'
  return { reason, jobsBefore, ownBefore, cpuMicrosBefore: microsBefore }
}

/** Logarithm of a job's time on the clock over its price: its own chunks speak as soon as there are any. */
function paceOf({ pace }: Snapshot, { done, doneMicros, chunkMicros }: OpenJob): number {
  const own = done > 0 && doneMicros > 0 && chunkMicros > 0 ? Math.log(doneMicros / (done * chunkMicros)) : pace.use.mean
  return (done * own + pace.use.mean) / (done + 1) + pace.stretch.mean
}

function predict(snapshot: Snapshot, job: OpenJob, { end }: Course): Prediction {
  const { use, stretch } = snapshot.pace
  const left = Math.max(1, job.ready)
  const median = end + MERGING
  const spread = Math.sqrt(
    Math.max(LEAST_JOB_SPREAD, use.sd) ** 2 / (1 + job.done) + (use.sd ** 2 + stretch.sd ** 2) / left + LOAD_SPREAD ** 2
    + (job.queued ? ARRIVALS_SPREAD ** 2 : 0),
  )
  const bounds = job.queued ? snapshot.bounds.queued : snapshot.bounds.running
  return { median, spread, ...rangeOf(median, spread, bounds(median)) }
}

/** The range, in seconds from now, that bounds in units of the spread stand for. */
export function rangeOf(median: number, spread: number, [low, high]: readonly [number, number]): { low: number, high: number } {
  const at = (z: number) => Math.max(0, (median + 1) * Math.exp(z * spread) - 1)
  return { low: at(low), high: Math.max(at(high), at(low) + 0.5) }
}

/** By how many spreads an end missed its prediction. Seconds. */
export const missOf = (actual: number, median: number, spread: number): number => (Math.log(Math.max(0, actual) + 1) - Math.log(median + 1)) / spread

interface Queue { userId: string, virtualTime: number, jobs: { job: OpenJob, left: number }[] }

/** Plays the dispatcher's fair order through to the end of all work, at the pace of late. */
function rehearse(snapshot: Snapshot): Map<string, Course> {
  const { jobs, flying, slots, virtualNow, virtualTimes } = snapshot
  const byId = new Map(jobs.map(job => [job.id, job]))
  const courses = new Map<string, Course>()
  const free = new Slots(slots)
  let microsBefore = 0
  const begin = (id: string, start: number | null): Course => {
    const course = { start, end: 0, jobsBefore: courses.size, microsBefore, othersServed: false }
    courses.set(id, course)
    return course
  }
  for (const chunk of [...flying].sort((a, b) => Number(b.running) - Number(a.running))) {
    const job = byId.get(chunk.jobId)
    const whole = chunk.priceMicros / 1e6 * Math.exp(job ? paceOf(snapshot, job) : 0)
    const end = free.take(chunk.running ? remaining(whole, chunk) : whole + GAP)
    if (job) {
      const course = courses.get(job.id) ?? begin(job.id, null)
      course.end = Math.max(course.end, end)
    }
    microsBefore += chunk.priceMicros * (1 - chunk.progress)
  }
  const queues = queuesOf(jobs, virtualTimes, virtualNow)
  const atOnce = Math.max(1, Math.ceil(jobs.reduce((sum, { ready }) => sum + ready, 0) / MOST_STEPS))
  const served = new Set<string>()
  for (let user = nextContender(queues, virtualNow); user; user = nextContender(queues, virtualNow)) {
    const entry = user.jobs[0]!
    const { job } = entry
    const count = Math.min(entry.left, atOnce)
    const start = free.next
    const end = free.take(count * (job.chunkMicros / 1e6 * Math.exp(paceOf(snapshot, job)) + GAP))
    const known = courses.get(job.id)
    const course = known ?? begin(job.id, start)
    if (!known) course.othersServed = served.size > 1 || (served.size === 1 && !served.has(job.userId))
    course.end = Math.max(course.end, end)
    microsBefore += count * job.chunkMicros
    user.virtualTime = afterServing(user.virtualTime, virtualNow, count * job.chunkMicros)
    served.add(user.userId)
    entry.left -= count
    if (entry.left === 0) user.jobs.shift()
    if (user.jobs.length === 0) queues.splice(queues.indexOf(user), 1)
  }
  // All chunks are done and being put together.
  for (const job of jobs) if (!courses.has(job.id)) begin(job.id, null)
  return courses
}

function queuesOf(jobs: readonly OpenJob[], virtualTimes: ReadonlyMap<string, number>, virtualNow: number): Queue[] {
  const queues = new Map<string, Queue>()
  for (const job of jobs) {
    if (job.ready === 0) continue
    const queue = queues.get(job.userId) ?? { userId: job.userId, virtualTime: virtualTimes.get(job.userId) ?? virtualNow, jobs: [] }
    queues.set(job.userId, queue)
    queue.jobs.push({ job, left: job.ready })
  }
  return [...queues.values()]
}

/** Seconds that a running chunk still takes: its own pace counts the more the further it is. */
function remaining(whole: number, { progress, elapsedSeconds }: Flying): number {
  const byPrice = whole * (1 - progress)
  if (progress < 0.05) return Math.max(byPrice, whole - elapsedSeconds, 0.1)
  return Math.max(0.05, (1 - progress) * byPrice + progress * elapsedSeconds * (1 - progress) / progress)
}

/** When each slot is free, seconds from now. */
class Slots {
  private readonly times: Float64Array

  constructor(count: number) {
    this.times = new Float64Array(count)
  }

  /** When the first slot is free. */
  get next(): number {
    return this.times[this.first()]!
  }

  /** Gives the first free slot work for so long; answers when it is done. */
  take(seconds: number): number {
    return this.times[this.first()]! += seconds
  }

  private first(): number {
    let first = 0
    for (let k = 1; k < this.times.length; k++) if (this.times[k]! < this.times[first]!) first = k
    return first
  }
}
