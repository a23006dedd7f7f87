import { literal } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { Literal } from 'sequelize/types/utils'
import type { Database } from '../models/database'
import { announceJob } from '../models/events'
import type { AttemptOutcome, ChunkState } from '../models/jobs'
import { settle } from '../models/ledger'
import { checksumOf } from '../models/results'
import { inTransaction, update } from '../models/transaction'
import type { Claim } from './claim'
import { endJobAsFailed } from './failure'

/** Starts of one chunk after which a crash is taken for the chunk's own doing. */
export const MOST_STARTS = 3

// Every write below carries the fencing number and is refused, with nothing changed, when the chunk was handed to another
// worker meanwhile. All lock the job's row before its chunks', so that they never wait for each other in a circle.

/**
 * Stores a chunk's result, once. `last`: the job's chunks are all done now. `fenced`: refused. One statement does it all, since
 * it is done for every chunk: chunk, attempt and job change together or not at all.
 */
export async function finishChunk(db: Database, claim: Claim, payload: Uint8Array, cpuMicros: number): Promise<'stored' | 'last' | 'fenced'> {
  const { affected, lastId } = await update(db, `
    UPDATE jobs
      STRAIGHT_JOIN chunks ON chunks.jobId = jobs.id
      STRAIGHT_JOIN attempts ON attempts.chunkId = chunks.id AND attempts.attempt = chunks.attempt
    SET jobs.chunksDone = LAST_INSERT_ID(jobs.chunksDone + 1), jobs.cpuMicros = jobs.cpuMicros + :cpuMicros,
      chunks.state = 'done', chunks.payload = :payload, chunks.checksum = :checksum, chunks.cpuMicros = :cpuMicros, chunks.progress = 1000,
      chunks.finishedAt = UTC_TIMESTAMP(3),
      attempts.outcome = 'done', attempts.cpuMicros = :cpuMicros, attempts.endedAt = UTC_TIMESTAMP(3), attempts.error = NULL
    WHERE jobs.id = :jobId AND chunks.id = :chunkId AND chunks.attempt = :attempt AND chunks.state = 'running'`,
  { ...claim, cpuMicros, payload: Buffer.from(payload.buffer, payload.byteOffset, payload.byteLength), checksum: checksumOf(payload) })
  if (affected === 0) return 'fenced'
  const job = await db.models.Job.findByPk(claim.jobId, { attributes: ['state', 'chunksTotal'], rejectOnEmpty: true })
  if (job.state === 'running') return lastId >= job.chunksTotal ? 'last' : 'stored'
  await inTransaction(db, tx => settleAndTell(db, tx, claim.jobId))
  return 'stored'
}

/** Why an attempt ended without a result, and the CPU microseconds that it used. */
export interface Ending { reason: string, cpuMicros: number }

/**
 * Notes an attempt that a fault of the service ended: nobody pays for it, and the chunk is ready again. After the third
 * start the chunk is given up and its job fails with the reason in words.
 */
export async function loseAttempt(db: Database, claim: Claim, { reason, cpuMicros }: Ending): Promise<'again' | 'given up' | 'fenced'> {
  const { Chunk } = db.models
  return inTransaction(db, async (tx) => {
    const job = await lockJob(db, tx, claim.jobId)
    const chunk = await Chunk.findOne({
      where: { id: claim.chunkId, attempt: claim.attempt, state: 'running' }, attributes: ['starts', 'firstTrial', 'trialCount'], lock: tx.LOCK.UPDATE, transaction: tx,
    })
    if (!chunk) return 'fenced'
    const wanted = job.state === 'running' || job.state === 'queued'
    const giveUp = wanted && chunk.starts >= MOST_STARTS
    await endRunning(db, tx, claim, wanted ? (giveUp ? 'failed' : 'ready') : 'cancelled', { outcome: 'lost', reason, cpuMicros })
    if (giveUp) {
      const trials = chunk.trialCount === 1 ? `trial ${chunk.firstTrial + 1}` : `trials ${chunk.firstTrial + 1} to ${chunk.firstTrial + chunk.trialCount}`
      await endJobAsFailed(db, tx, job.id, `The solver broke down on ${trials} in each of ${chunk.starts} starts, so the job was stopped. Last time: ${reason}. You are not charged for those starts.`)
    }
    else if (!wanted) {
      await settleAndTell(db, tx, job.id)
    }
    return giveUp ? 'given up' : 'again'
  })
}

/** Hands a chunk back because its worker shuts down. The start does not count towards giving the chunk up. */
export async function releaseChunk(db: Database, claim: Claim, cpuMicros: number): Promise<void> {
  await inTransaction(db, async (tx) => {
    const job = await lockJob(db, tx, claim.jobId)
    const wanted = job.state === 'running' || job.state === 'queued'
    const ended = await endRunning(db, tx, claim, wanted ? 'ready' : 'cancelled', { outcome: 'killed', reason: 'its worker was shut down', cpuMicros })
    if (!ended) return
    await db.models.Chunk.update({ starts: literal('GREATEST(starts - 1, 0)') }, { where: { id: claim.chunkId }, transaction: tx })
    if (!wanted) await settleAndTell(db, tx, job.id)
  })
}

/** Notes that a chunk was stopped because its job is not wanted any more; a cancelled job's owner pays what it used. */
export async function stopChunk(db: Database, claim: Claim, cpuMicros: number): Promise<void> {
  const { Job } = db.models
  await inTransaction(db, async (tx) => {
    const job = await lockJob(db, tx, claim.jobId)
    const cancelled = job.state === 'cancelled'
    const reason = cancelled ? 'the job was cancelled' : 'the job ended'
    if (!await endRunning(db, tx, claim, 'cancelled', { outcome: cancelled ? 'cancelled' : 'killed', reason, cpuMicros })) return
    if (cancelled) await Job.update({ cpuMicros: job.cpuMicros + cpuMicros }, { where: { id: job.id }, transaction: tx })
    await settleAndTell(db, tx, job.id)
  })
}

/** Fails a chunk and its job at once: another start would end the same way. The reason is shown to the owner, who pays what it used. */
export async function failChunk(db: Database, claim: Claim, ending: Ending): Promise<void> {
  await inTransaction(db, async (tx) => {
    const job = await lockJob(db, tx, claim.jobId)
    if (!await endRunning(db, tx, claim, 'failed', { ...ending, outcome: 'failed' })) return
    await db.models.Job.update({ cpuMicros: job.cpuMicros + ending.cpuMicros }, { where: { id: job.id }, transaction: tx })
    if (job.state === 'running' || job.state === 'queued') await endJobAsFailed(db, tx, job.id, ending.reason)
    else await settleAndTell(db, tx, job.id)
  })
}

/** Adds what a fenced-off attempt turned out to have used. */
export async function noteLateUse(db: Database, claim: Claim, cpuMicros: number): Promise<void> {
  await db.models.Attempt.update({ cpuMicros }, { where: { chunkId: claim.chunkId, attempt: claim.attempt, outcome: 'lost' } })
}

function lockJob(db: Database, tx: Transaction, jobId: string) {
  return db.models.Job.findByPk(jobId, {
    attributes: ['id', 'state', 'cpuMicros', 'chunksTotal', 'chunksDone'], lock: tx.LOCK.UPDATE, rejectOnEmpty: true, transaction: tx,
  })
}

/** Takes a chunk out of `running` under its fencing number; answers false when it is not this attempt that runs. */
async function endRunning(db: Database, tx: Transaction, claim: Claim, state: ChunkState, ending: Ending & { outcome: AttemptOutcome }): Promise<boolean> {
  const [ended] = await db.models.Chunk.update({
    state, progress: 0, queuedAt: null, error: state === 'failed' ? ending.reason.slice(0, 1000) : null,
  }, { where: { id: claim.chunkId, attempt: claim.attempt, state: 'running' }, transaction: tx })
  if (ended === 0) return false
  // What the heartbeats have noted stays when whoever ends the attempt knows less.
  await endAttempt(db, tx, claim, { ...ending, cpuMicros: literal(`GREATEST(cpuMicros, ${Math.round(ending.cpuMicros)})`) })
  return true
}

async function endAttempt(
  db: Database, tx: Transaction, claim: Claim, end: { outcome: AttemptOutcome, cpuMicros: number | Literal, reason?: string },
): Promise<void> {
  await db.models.Attempt.update({
    outcome: end.outcome, cpuMicros: end.cpuMicros, endedAt: literal('UTC_TIMESTAMP(3)'), error: end.reason?.slice(0, 1000) ?? null,
  }, { where: { chunkId: claim.chunkId, attempt: claim.attempt }, transaction: tx })
}

async function settleAndTell(db: Database, tx: Transaction, jobId: string): Promise<void> {
  await settle(db, tx, jobId)
  await announceJob(db, tx, jobId)
}
