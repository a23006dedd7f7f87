import { QueryTypes, literal } from 'sequelize'
import { ENGINE_VERSION } from '#shared/physics/engine'
import type { JobState } from '#shared/schemas/api'
import type { JobSpec } from '#shared/schemas/job'
import type { Database } from '../models/database'
import { announceJob } from '../models/events'
import { specOf } from '../models/results'
import { inTransaction, update } from '../models/transaction'
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
  return inTransaction(db, async (tx) => {
    // Locks the job alone; what is read of the chunk here never changes.
    const [found] = await db.sequelize.query<Found>(`
      SELECT jobs.id AS jobId, jobs.state AS state, jobs.spec AS spec, jobs.engineVersion AS engineVersion,
        (SELECT firstTrial FROM chunks WHERE id = :chunkId) AS firstTrial, (SELECT trialCount FROM chunks WHERE id = :chunkId) AS trialCount,
        (SELECT predictedCpuMicros FROM chunks WHERE id = :chunkId) AS predictedCpuMicros
      FROM jobs WHERE jobs.id = (SELECT jobId FROM chunks WHERE id = :chunkId) FOR UPDATE`,
    { replacements: { chunkId }, type: QueryTypes.SELECT, transaction: tx })
    if (!found || (found.state !== 'queued' && found.state !== 'running')) return null
    const { jobId, engineVersion, spec, firstTrial, trialCount, predictedCpuMicros } = found
    if (engineVersion !== ENGINE_VERSION) {
      await endJobAsFailed(db, tx, jobId, `This job was queued for engine ${engineVersion}; the solver here is ${ENGINE_VERSION}. Run it again.`)
      return null
    }
    const { affected: claimed, lastId: attempt } = await update(db, `
      UPDATE chunks SET state = 'running', attempt = LAST_INSERT_ID(attempt + 1), starts = starts + 1, workerId = :workerId,
        startedAt = UTC_TIMESTAMP(3), heartbeatAt = UTC_TIMESTAMP(3), progress = 0, error = NULL
      WHERE id = :chunkId AND state IN ('ready', 'queued')`, { chunkId, workerId }, tx)
    if (claimed === 0) return null
    await db.sequelize.query('INSERT INTO attempts (chunkId, attempt, workerId, startedAt) VALUES (:chunkId, :attempt, :workerId, UTC_TIMESTAMP(3))', {
      replacements: { chunkId, attempt, workerId }, type: QueryTypes.INSERT, transaction: tx,
    })
    if (found.state === 'queued') {
      await db.models.Job.update({ state: 'running', startedAt: literal('UTC_TIMESTAMP(3)') }, { where: { id: jobId }, transaction: tx })
      await announceJob(db, tx, jobId)
    }
    return { chunkId, jobId, attempt, spec: specOf({ spec }), firstTrial, trialCount, predictedCpuMicros }
  })
}

interface Found { jobId: string, state: JobState, spec: string, engineVersion: string, firstTrial: number, trialCount: number, predictedCpuMicros: number }
