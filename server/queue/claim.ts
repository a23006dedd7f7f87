import { literal } from 'sequelize'
import { ENGINE_VERSION } from '#shared/physics/engine'
import type { JobSpec } from '#shared/schemas/job'
import type { Database } from '../models/database'
import { announceJob } from '../models/events'
import { specOf } from '../models/results'
import { inTransaction } from '../models/transaction'
import { endJobAsFailed } from './failure'

/** A chunk that a worker runs, with the fencing number under which it may write. */
export interface Claim { chunkId: number, jobId: string, attempt: number }

export interface ClaimedChunk extends Claim {
  spec: JobSpec
  firstTrial: number
  trialCount: number
  predictedCpuMicros: number
}

/**
 * Takes a chunk for a worker under a new fencing number. Null when there is nothing to do: it is taken, done or
 * cancelled, or its job was made for another version of the engine, which fails the job.
 */
export async function claimChunk(db: Database, workerId: string, chunkId: number): Promise<ClaimedChunk | null> {
  const { Attempt, Chunk, Job } = db.models
  return inTransaction(db, async (tx) => {
    const found = await Chunk.findByPk(chunkId, { attributes: ['jobId'], transaction: tx })
    if (!found) return null
    const job = await Job.findByPk(found.jobId, { attributes: ['id', 'state', 'spec', 'engineVersion'], lock: tx.LOCK.UPDATE, transaction: tx })
    if (!job || (job.state !== 'queued' && job.state !== 'running')) return null
    if (job.engineVersion !== ENGINE_VERSION) {
      await endJobAsFailed(db, tx, job.id, `This job was queued for engine ${job.engineVersion}; the solver here is ${ENGINE_VERSION}. Run it again.`)
      return null
    }
    const now = literal('UTC_TIMESTAMP(3)')
    const [claimed] = await Chunk.update({
      state: 'running', attempt: literal('attempt + 1'), starts: literal('starts + 1'), workerId, startedAt: now, heartbeatAt: now, progress: 0, error: null,
    }, { where: { id: chunkId, state: ['ready', 'queued'] }, transaction: tx })
    if (claimed === 0) return null
    const chunk = await Chunk.findByPk(chunkId, {
      attributes: ['attempt', 'firstTrial', 'trialCount', 'predictedCpuMicros', 'startedAt'], rejectOnEmpty: true, transaction: tx,
    })
    await Attempt.create({ chunkId, attempt: chunk.attempt, workerId, startedAt: chunk.startedAt ?? new Date() }, { transaction: tx })
    if (job.state === 'queued') {
      await Job.update({ state: 'running', startedAt: now }, { where: { id: job.id }, transaction: tx })
      await announceJob(db, tx, job.id)
    }
    const { attempt, firstTrial, trialCount, predictedCpuMicros } = chunk
    return { chunkId, jobId: job.id, attempt, spec: specOf(job), firstTrial, trialCount, predictedCpuMicros }
  })
}
