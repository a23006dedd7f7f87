import { Op, QueryTypes } from 'sequelize'
import type { JobDetail, JobSummary, Me } from '#shared/schemas/api'
import type { Database } from '../models/database'
import { JOB_SUMMARY_COLUMNS } from '../models/jobs'
import type { Job } from '../models/jobs'
import { presentJob, progressOf } from '../models/present'
import { answerOf, partialResult, specOf } from '../models/results'
import type { Result } from '../models/results'
import { presentOutlook, readOutlooks } from '../queue/outlooks'
import type { Outlooks } from '../queue/outlooks'
import type { Auth } from './auth'
import { errorFields, useLog } from './log'
import { HttpProblem, isDatabaseUnavailable } from './problems'

/** Columns of a job without its answer and paths, which may be megabytes. */
const HEAD_COLUMNS = [...JOB_SUMMARY_COLUMNS, 'spec', 'specHash', 'seed', 'engineVersion'] as const

/** A job that the reader's team has. @throws HttpProblem not-found for another team's, a deleted and an unknown one */
export async function findTeamJob(db: Database, auth: Auth, id: string): Promise<Job> {
  const job = await db.models.Job.findOne({ where: { id, teamId: auth.team.id, deletedAt: { [Op.is]: null } }, attributes: [...HEAD_COLUMNS] })
  if (!job) throw new HttpProblem('not-found')
  return job
}

/** @throws HttpProblem forbidden for a job that is neither the user's own nor under the user's administration */
export function requireOwner(auth: Auth, row: { ownerId: string }): void {
  if (row.ownerId !== auth.user.id && auth.user.role !== 'admin') throw new HttpProblem('forbidden', { detail: 'Only its owner or an admin may change this.' })
}

/** Answer and packed paths as far as the job has got, also when it was ended before its time; null when no part of it is done. */
export async function resultOf(db: Database, job: Job): Promise<Result | null> {
  if (job.state !== 'done') {
    try {
      return await partialResult(db, job)
    }
    catch (error) {
      if (isDatabaseUnavailable(error)) throw error
      // Parts that do not go together are the workers' to mend; until then there is no partial answer.
      useLog().warn({ jobId: job.id, ...errorFields(error) }, 'no partial answer')
      return null
    }
  }
  const row = await db.models.Job.findByPk(job.id, { attributes: ['answer', 'paths'] })
  const answer = row && answerOf(row)
  return answer && row.paths ? { answer, paths: row.paths } : null
}

/** A job for one reader, with its answer. */
export async function presentDetail(db: Database, auth: Auth, job: Job): Promise<JobDetail> {
  const [summary] = await presentSummaries(db, auth, [job])
  return {
    ...summary!,
    spec: specOf(job),
    specHash: job.specHash,
    seed: job.seed,
    engineVersion: job.engineVersion,
    chunks: { total: job.chunksTotal, done: job.chunksDone },
    answer: job.state === 'queued' ? null : (await resultOf(db, job))?.answer ?? null,
  }
}

/** Jobs for one reader, in the order given. */
export async function presentSummaries(db: Database, auth: Auth, jobs: readonly Job[]): Promise<JobSummary[]> {
  const owners = await db.models.User.findAll({ where: { id: [...new Set(jobs.map(job => job.ownerId))] }, attributes: ['id', 'name'] })
  const names = new Map(owners.map(owner => [owner.id, owner.name]))
  const running = await progressOf(db, jobs)
  const open = jobs.filter(({ state }) => state === 'queued' || state === 'running').map(({ id }) => id)
  const outlooks = open.length > 0 ? await readOutlooks(db, open) : null
  return jobs.map(job => ({
    ...presentJob(job, { id: job.ownerId, name: names.get(job.ownerId) ?? '' }, running.get(job.id) ?? 0),
    own: job.ownerId === auth.user.id,
    ...outlookFor(outlooks, job),
  }))
}

/** An outlook may be a second old: what it says of waiting no longer holds for a job that has begun since. */
function outlookFor(outlooks: Outlooks | null, { id, state }: Job): Pick<JobSummary, 'waiting' | 'eta'> {
  if (!outlooks || (state !== 'queued' && state !== 'running')) return { waiting: null, eta: null }
  const { waiting, eta } = presentOutlook(outlooks, id)
  return { waiting: state === 'queued' ? waiting : null, eta }
}

/** Ids of a user's jobs that wait or run, the newest hundred. */
export async function openJobsOf(db: Database, ownerId: string): Promise<string[]> {
  const rows = await db.models.Job.findAll({
    where: { ownerId, state: ['queued', 'running'], deletedAt: { [Op.is]: null } }, attributes: ['id'], order: [['id', 'DESC']], limit: 100,
  })
  return rows.map(row => row.id)
}

/** What waits and runs on this installation, all teams together, and the solvers there are for it. */
export async function queueOf(db: Database): Promise<Me['queue']> {
  const { waiting, micros } = await unfinished(db)
  const [fleet] = await db.sequelize.query<{ slots: number }>(`
    SELECT CAST(COALESCE(SUM(slots), 0) AS SIGNED) AS slots FROM workers WHERE heartbeatAt > UTC_TIMESTAMP(3) - INTERVAL 30 SECOND`,
  { type: QueryTypes.SELECT })
  return { waitingJobs: waiting, waitingCpuSeconds: micros / 1e6, slots: fleet?.slots ?? 0 }
}

/** Jobs queued or running, those of them queued, and the CPU microseconds that they have before them. */
async function unfinished(db: Database): Promise<{ jobs: number, waiting: number, micros: number }> {
  const [row] = await db.sequelize.query<{ jobs: number, waiting: number, micros: number }>(`
    SELECT COUNT(*) AS jobs, CAST(COALESCE(SUM(state = 'queued'), 0) AS SIGNED) AS waiting,
      CAST(COALESCE(SUM(predictedCpuMicros * (1 - chunksDone / GREATEST(chunksTotal, 1))), 0) AS SIGNED) AS micros
    FROM jobs WHERE state IN ('queued', 'running')`,
  { type: QueryTypes.SELECT })
  return row ?? { jobs: 0, waiting: 0, micros: 0 }
}
