import { QueryTypes } from 'sequelize'
import type { JobSummary } from '#shared/schemas/api'
import type { Database } from '../models/database'
import { boundsOf, paceOfChunks } from './experience'
import type { DoneChunk, Scored } from './experience'
import { STALE_SECONDS } from './fleet'
import { outlooks } from './outlook'
import type { Bounds, Flying, OpenJob, Outlook, Pace, Snapshot } from './outlook'
import { waitingWords } from './waitingWords'

/** What is said of the open jobs at one time; times on the database's clock. */
export interface Outlooks {
  at: Date
  slots: number
  jobs: ReadonlyMap<string, Outlook & { teamId: string, stage: { queued: boolean, progress: number } }>
}

const FRESH_MS = 1000
const SOONEST_MS = 250
/** Of the time, no more than this share goes into the outlook, however long the queue. */
const SHARE = 0.05
const EXPERIENCE_MS = 10_000
const RECENT_CHUNKS = 200
const RECENT_PREDICTIONS = 400
/** Seconds on the way to a worker after which a free slot should have taken a chunk. */
const STUCK_SECONDS = 3

/** Reads and keeps the outlook of one database for about a second, so that many readers cost one. */
class Lookout {
  private kept: { outlooks: Promise<Outlooks>, madeAt: number, costMs: number } | null = null
  private experience: { pace: Pace, bounds: Bounds, madeAt: number } | null = null

  constructor(private readonly db: Database) {}

  /** `wanted`: open jobs that a reader asks for; one that came in since makes it look again. */
  async read(wanted: readonly string[] = []): Promise<Outlooks> {
    const { kept } = this
    if (kept) {
      const age = performance.now() - kept.madeAt
      if (age < Math.max(SOONEST_MS, kept.costMs / SHARE)) return kept.outlooks
      if (age < FRESH_MS) {
        const known = await kept.outlooks
        if (wanted.every(id => known.jobs.has(id))) return known
      }
    }
    return this.kept === kept ? this.look() : this.kept!.outlooks
  }

  private look(): Promise<Outlooks> {
    const madeAt = performance.now()
    const made = this.make()
    const kept = { outlooks: made, madeAt, costMs: 0 }
    this.kept = kept
    made.then(() => {
      kept.costMs = performance.now() - madeAt
    }, () => {
      if (this.kept === kept) this.kept = null
    })
    return made
  }

  private async make(): Promise<Outlooks> {
    const { db } = this
    const jobs = await openJobs(db)
    const [state] = await db.sequelize.query<{ at: Date, slots: number, led: number, furthest: number }>(`
      SELECT UTC_TIMESTAMP(3) AS at,
        (SELECT CAST(COALESCE(SUM(slots), 0) AS SIGNED) FROM workers WHERE heartbeatAt > UTC_TIMESTAMP(3) - INTERVAL ${STALE_SECONDS} SECOND) AS slots,
        EXISTS (SELECT 1 FROM leases WHERE expiresAt > UTC_TIMESTAMP(3)) AS led,
        (SELECT COALESCE(MAX(virtualTimeMicros), 0) FROM users) AS furthest`, { type: QueryTypes.SELECT })
    if (!state) throw new Error('The database did not tell the time.')
    const { at, slots } = state
    if (jobs.length === 0) return { at, slots, jobs: new Map() }
    const flying = await flyingChunks(db)
    const virtualTimes = await virtualTimesOf(db, jobs)
    const { pace, bounds } = await this.experiences()
    const busy = flying.filter(({ running }) => running).length
    const mending = busy < slots && (state.led === 0 || flying.some(({ running, sinceSeconds }) => !running && sinceSeconds > STUCK_SECONDS))
    const snapshot: Snapshot = { slots, mending, virtualNow: virtualNowOf(flying, virtualTimes, jobs, state.furthest), virtualTimes, jobs: withReady(jobs, flying), flying, pace, bounds }
    const said = outlooks(snapshot)
    const progress = progressOfFlying(flying)
    return {
      at, slots,
      jobs: new Map(jobs.map(({ id, teamId, queued, done, total }) => [
        id, { ...said.get(id)!, teamId, stage: { queued, progress: Math.min(1, (done + (progress.get(id) ?? 0)) / Math.max(1, total)) } },
      ])),
    }
  }

  private async experiences(): Promise<{ pace: Pace, bounds: Bounds }> {
    if (this.experience && performance.now() - this.experience.madeAt < EXPERIENCE_MS) return this.experience
    const pace = paceOfChunks(await recentChunks(this.db))
    const bounds = boundsOf(await scoredPredictions(this.db))
    this.experience = { pace, bounds, madeAt: performance.now() }
    return this.experience
  }
}

const lookouts = new WeakMap<Database, Lookout>()

/** The outlook of all open jobs, at most about a second old. */
export function readOutlooks(db: Database, wanted?: readonly string[]): Promise<Outlooks> {
  const lookout = lookouts.get(db) ?? new Lookout(db)
  lookouts.set(db, lookout)
  return lookout.read(wanted)
}

/** What the API says of one job's outlook. */
export function presentOutlook({ at, slots, jobs }: Outlooks, jobId: string): Pick<JobSummary, 'waiting' | 'eta'> {
  const outlook = jobs.get(jobId)
  if (!outlook) return { waiting: null, eta: null }
  const { waiting, prediction } = outlook
  const instant = (seconds: number) => new Date(at.getTime() + 1000 * seconds).toISOString()
  return {
    waiting: waiting && {
      reason: waiting.reason, words: waitingWords(waiting.reason, { slots, ownBefore: waiting.ownBefore }), jobsBefore: waiting.jobsBefore, cpuSecondsBefore: waiting.cpuMicrosBefore / 1e6,
    },
    eta: prediction && { low: instant(prediction.low), high: instant(prediction.high) },
  }
}

interface OpenRow { id: string, teamId: string, userId: string, queued: boolean, priceMicros: number, doneMicros: number, total: number, done: number }
type FlyingRow = Flying & { sinceSeconds: number }

async function openJobs(db: Database): Promise<OpenRow[]> {
  const rows = await db.sequelize.query<Omit<OpenRow, 'queued'> & { queued: number }>(`
    SELECT id, teamId, ownerId AS userId, state = 'queued' AS queued, predictedCpuMicros AS priceMicros, cpuMicros AS doneMicros, chunksTotal AS total, chunksDone AS done
    FROM jobs WHERE state IN ('queued', 'running') ORDER BY id`, { type: QueryTypes.SELECT })
  return rows.map(row => ({ ...row, queued: row.queued === 1 }))
}

async function flyingChunks(db: Database): Promise<FlyingRow[]> {
  const rows = await db.sequelize.query<{ jobId: string, running: number, priceMicros: number, permille: number, sinceSeconds: number | null }>(`
    SELECT jobId, state = 'running' AS running, predictedCpuMicros AS priceMicros, progress AS permille,
      CAST(TIMESTAMPDIFF(MICROSECOND, IF(state = 'running', startedAt, queuedAt), UTC_TIMESTAMP(3)) / 1e6 AS DOUBLE) AS sinceSeconds
    FROM chunks WHERE state IN ('queued', 'running') ORDER BY queuedAt, id`, { type: QueryTypes.SELECT })
  return rows.map(({ jobId, running, priceMicros, permille, sinceSeconds }) => ({
    jobId, running: running === 1, priceMicros, progress: permille / 1000, sinceSeconds: sinceSeconds ?? 0, elapsedSeconds: running === 1 ? Math.max(0, sinceSeconds ?? 0) : 0,
  }))
}

function withReady(jobs: readonly OpenRow[], flying: readonly Flying[]): OpenJob[] {
  const away = new Map<string, number>()
  for (const { jobId } of flying) away.set(jobId, (away.get(jobId) ?? 0) + 1)
  return jobs.map(({ id, userId, queued, priceMicros, doneMicros, total, done }) => ({
    id, userId, queued, chunkMicros: priceMicros / Math.max(1, total), ready: Math.max(0, total - done - (away.get(id) ?? 0)), done, doneMicros,
  }))
}

function progressOfFlying(flying: readonly Flying[]): Map<string, number> {
  const progress = new Map<string, number>()
  for (const chunk of flying) progress.set(chunk.jobId, (progress.get(chunk.jobId) ?? 0) + chunk.progress)
  return progress
}

async function virtualTimesOf(db: Database, jobs: readonly OpenRow[]): Promise<Map<string, number>> {
  const users = await db.models.User.findAll({ where: { id: [...new Set(jobs.map(({ userId }) => userId))] }, attributes: ['id', 'virtualTimeMicros'], raw: true })
  return new Map(users.map(({ id, virtualTimeMicros }) => [id, virtualTimeMicros]))
}

/** As the dispatcher has it: where the least advanced user with chunks in flight started them; with none, where the furthest has come. */
function virtualNowOf(flying: readonly Flying[], virtualTimes: ReadonlyMap<string, number>, jobs: readonly OpenRow[], furthest: number): number {
  const owners = new Map(jobs.map(({ id, userId }) => [id, userId]))
  const away = new Map<string, number>()
  for (const { jobId, priceMicros } of flying) {
    const userId = owners.get(jobId)
    if (userId !== undefined) away.set(userId, (away.get(userId) ?? 0) + priceMicros)
  }
  const starts = [...away].map(([userId, micros]) => (virtualTimes.get(userId) ?? 0) - micros)
  return starts.length > 0 ? Math.min(...starts) : furthest
}

function recentChunks(db: Database): Promise<DoneChunk[]> {
  return db.sequelize.query<DoneChunk>(`
    SELECT chunks.predictedCpuMicros AS priceMicros, recent.cpuMicros AS cpuMicros,
      CAST(TIMESTAMPDIFF(MICROSECOND, recent.startedAt, recent.endedAt) / 1e6 AS DOUBLE) AS wallSeconds
    FROM (SELECT chunkId, cpuMicros, startedAt, endedAt FROM attempts WHERE outcome = 'done' ORDER BY id DESC LIMIT ${RECENT_CHUNKS}) AS recent
    JOIN chunks ON chunks.id = recent.chunkId`, { type: QueryTypes.SELECT })
}

/** The latest predictions whose jobs have ended by themselves. */
export function scoredPredictions(db: Database, limit = RECENT_PREDICTIONS): Promise<(Scored & { low: number, high: number })[]> {
  return db.sequelize.query<Scored & { low: number, high: number }>(`
    SELECT made.stage AS stage, made.medianSeconds AS median, made.spread AS spread, made.lowSeconds AS low, made.highSeconds AS high,
      CAST(TIMESTAMPDIFF(MICROSECOND, made.madeAt, jobs.finishedAt) / 1e6 AS DOUBLE) AS actual
    FROM etaPredictions AS made JOIN jobs ON jobs.id = made.jobId
    WHERE jobs.state = 'done' AND jobs.finishedAt >= made.madeAt ORDER BY made.madeAt DESC LIMIT ${limit}`, { type: QueryTypes.SELECT })
}
