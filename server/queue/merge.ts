import { literal } from 'sequelize'
import type { JobSpec } from '#shared/schemas/job'
import type { Database } from '../models/database'
import { announceJob } from '../models/events'
import { mailJobEnd } from '../models/jobMail'
import type { Chunk } from '../models/jobs'
import { settle } from '../models/ledger'
import { checksumOf, specOf } from '../models/results'
import { inTransaction } from '../models/transaction'
import { endJobAsFailed } from './failure'

const LONGEST_HEADLINE = 300

/** What the parts of a job come to: the answer as JSON text, its sentence, and the packed paths. */
export interface Merged { answer: string, headline: string, paths: Uint8Array }

/** Puts parts together; done away from the process that keeps the queue's locks, since it may take seconds. */
export type Merge = (spec: JobSpec, parts: readonly Uint8Array[]) => Promise<Merged>

/** The parts are sound and still give no answer. */
export class MergeRefused extends Error {
  override name = 'MergeRefused'
}

/** The process that was merging ended before it had an answer; another try may do better. */
export class SolverDied extends Error {
  override name = 'SolverDied'
}

/**
 * Finishes a job whose chunks are all done: checks every part against its checksum, merges them, stores the answer and
 * settles, once whoever else tries. A part that fails its check is computed again.
 */
export async function mergeJob(db: Database, jobId: string, merge: Merge): Promise<'merged' | 'recompute' | 'nothing to do' | 'failed'> {
  const { Chunk, Job } = db.models
  const job = await Job.findByPk(jobId, { attributes: ['state', 'spec', 'chunksTotal'] })
  if (job?.state !== 'running') return 'nothing to do'
  const chunks = await Chunk.findAll({ where: { jobId, state: 'done' }, attributes: ['id', 'attempt', 'cpuMicros', 'payload', 'checksum'], order: [['ordinal', 'ASC']] })
  const damaged = chunks.filter(({ payload, checksum }) => !payload || checksumOf(payload) !== checksum)
  if (damaged.length > 0) {
    await computeAgain(db, jobId, damaged)
    return 'recompute'
  }
  if (chunks.length < job.chunksTotal) return 'nothing to do'
  try {
    const merged = await merge(specOf(job), chunks.flatMap(({ payload }) => payload ? [payload] : []))
    return await storeAnswer(db, jobId, merged) ? 'merged' : 'nothing to do'
  }
  catch (error) {
    if (!(error instanceof MergeRefused)) throw error
    await failMerge(db, jobId, error.message)
    return 'failed'
  }
}

/** Fails a job whose parts give no answer. */
export async function failMerge(db: Database, jobId: string, reason: string): Promise<void> {
  await inTransaction(db, async (tx) => {
    await db.models.Job.findByPk(jobId, { attributes: ['id'], lock: tx.LOCK.UPDATE, transaction: tx })
    await endJobAsFailed(db, tx, jobId, `The parts of this job could not be put together: ${reason}`)
  })
}

async function storeAnswer(db: Database, jobId: string, { answer, headline, paths }: Merged): Promise<boolean> {
  return inTransaction(db, async (tx) => {
    const { Job } = db.models
    await Job.findByPk(jobId, { attributes: ['id'], lock: tx.LOCK.UPDATE, transaction: tx })
    const [stored] = await Job.update({
      answer, headline: headline.slice(0, LONGEST_HEADLINE), paths: Buffer.from(paths.buffer, paths.byteOffset, paths.byteLength),
      state: 'done', error: null, finishedAt: literal('UTC_TIMESTAMP(3)'),
    }, { where: { id: jobId, state: 'running', chunksDone: literal('chunksTotal') }, transaction: tx })
    if (stored === 0) return false
    await settle(db, tx, jobId)
    await mailJobEnd(db, tx, jobId)
    await announceJob(db, tx, jobId)
    return true
  })
}

async function computeAgain(db: Database, jobId: string, damaged: readonly Chunk[]): Promise<void> {
  await inTransaction(db, async (tx) => {
    const { Attempt, Chunk, Job } = db.models
    const job = await Job.findByPk(jobId, { attributes: ['id', 'cpuMicros', 'chunksDone'], lock: tx.LOCK.UPDATE, rejectOnEmpty: true, transaction: tx })
    let { chunksDone, cpuMicros } = job
    for (const { id, attempt, cpuMicros: spent } of damaged) {
      const [again] = await Chunk.update({ state: 'ready', payload: null, checksum: null, cpuMicros: 0, progress: 0, queuedAt: null, finishedAt: null }, {
        where: { id, attempt, state: 'done' }, transaction: tx,
      })
      if (again === 0) continue
      await Attempt.update({ outcome: 'lost', error: 'its stored result failed the check' }, { where: { chunkId: id, attempt }, transaction: tx })
      chunksDone--
      cpuMicros -= spent
    }
    await Job.update({ chunksDone, cpuMicros: Math.max(0, cpuMicros) }, { where: { id: jobId }, transaction: tx })
    await announceJob(db, tx, jobId)
  })
}
