import { QueryTypes } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { JobSummary } from '#shared/schemas/api'
import type { Database } from './database'
import type { Job } from './jobs'

/** A job as everyone of its team sees it, without what changes by the second. */
export type TeamJob = Omit<JobSummary, 'own' | 'waiting' | 'eta'>

type SummaryRow = Pick<Job, 'id' | 'state' | 'question' | 'sentence' | 'predictedCpuMicros' | 'cpuMicros' | 'chunksTotal' | 'chunksDone'
  | 'headline' | 'error' | 'createdAt' | 'startedAt' | 'finishedAt' | 'presetId' | 'presetVersion' | 'presetName' | 'presetChanged'>

/** Row to API shape. `runningChunks`: how many chunks' worth of work the running chunks have done so far. */
export function presentJob(job: SummaryRow, owner: { id: string, name: string }, runningChunks: number): TeamJob {
  return {
    id: job.id,
    sentence: job.sentence,
    question: job.question,
    state: job.state,
    owner: { id: owner.id, name: owner.name },
    createdAt: job.createdAt.toISOString(),
    startedAt: job.startedAt?.toISOString() ?? null,
    finishedAt: job.finishedAt?.toISOString() ?? null,
    predictedCpuSeconds: job.predictedCpuMicros / 1e6,
    cpuSeconds: job.cpuMicros / 1e6,
    progress: job.state === 'done' ? 1 : Math.min(1, (job.chunksDone + runningChunks) / Math.max(1, job.chunksTotal)),
    headline: job.headline,
    error: job.error,
    preset: pinOf(job),
  }
}

/** The preset that a job was made from. */
export const pinOf = ({ presetId, presetVersion, presetName, presetChanged }: Pick<Job, 'presetId' | 'presetVersion' | 'presetName' | 'presetChanged'>): TeamJob['preset'] =>
  presetId === null || presetVersion === null ? null : { id: presetId, name: presetName ?? '', version: presetVersion, changed: presetChanged === true }

/** Work done so far by the running chunks of the running jobs among `jobs`, in chunks, by job. */
export async function progressOf(db: Database, jobs: readonly Pick<Job, 'id' | 'state'>[], tx?: Transaction): Promise<Map<string, number>> {
  const jobIds = jobs.filter(job => job.state === 'running').map(job => job.id)
  if (jobIds.length === 0) return new Map()
  const rows = await db.sequelize.query<{ jobId: string, permille: number }>(`
    SELECT jobId, CAST(SUM(progress) AS SIGNED) AS permille FROM chunks
    WHERE jobId IN (:jobIds) AND state = 'running' GROUP BY jobId`,
  { replacements: { jobIds }, type: QueryTypes.SELECT, transaction: tx ?? null })
  return new Map(rows.map(row => [row.jobId, row.permille / 1000]))
}
