import { QueryTypes } from 'sequelize'
import type { Database } from '../models/database'
import { announceJob } from '../models/events'
import { settle } from '../models/ledger'
import { inTransaction } from '../models/transaction'
import { MOST_STARTS, loseAttempt } from './attempts'
import type { ChunkQueue } from './chunkQueue'
import type { Claim } from './claim'
import { STALE_SECONDS } from './fleet'
import { SolverDied, failMerge, mergeJob } from './merge'
import type { Merge } from './merge'
import type { Dispatched } from './names'

/** Seconds that a message may take to reach a worker before it is looked for. */
const QUEUED_SECONDS = 3
/** Seconds that whoever finished a job's last chunk has to merge it. */
const UNMERGED_SECONDS = 10
const AT_ONCE = 200

// Each of these mends one thing that faults leave behind. One process at a time needs to do it, but nothing breaks when
// two do.

/** Ends attempts whose worker is silent, so that others may take their chunks. Answers how many, and how many chunks were given up. */
export async function fenceSilent(db: Database): Promise<{ fenced: number, givenUp: number }> {
  const silent = await db.sequelize.query<Claim>(`
    SELECT id AS chunkId, jobId, attempt FROM chunks
    WHERE state = 'running' AND heartbeatAt < UTC_TIMESTAMP(3) - INTERVAL ${STALE_SECONDS} SECOND LIMIT ${AT_ONCE}`, { type: QueryTypes.SELECT })
  let givenUp = 0
  for (const claim of silent) {
    if (await loseAttempt(db, claim, { reason: 'its worker stopped answering', cpuMicros: 0 }) === 'given up') givenUp++
  }
  return { fenced: silent.length, givenUp }
}

/** Makes chunks ready again whose message Redis has lost. Throws while Redis cannot be asked. */
export async function requeueLost(db: Database, queue: ChunkQueue): Promise<number> {
  const late = await db.sequelize.query<Dispatched>(`
    SELECT id AS chunkId, jobId, attempt FROM chunks
    WHERE state = 'queued' AND queuedAt < UTC_TIMESTAMP(3) - INTERVAL ${QUEUED_SECONDS} SECOND LIMIT ${AT_ONCE}`, { type: QueryTypes.SELECT })
  if (late.length === 0) return 0
  const lost = await queue.missing(late)
  if (lost.length === 0) return 0
  const [requeued] = await db.models.Chunk.update({ state: 'ready', queuedAt: null }, { where: { id: lost.map(({ chunkId }) => chunkId), state: 'queued' } })
  return requeued
}

/**
 * Merges jobs whose chunks are all done and that nobody has merged. `failures` counts, by job, the merges that broke down:
 * a job whose third one does fails with the reason.
 */
export async function mergeFinished(db: Database, merge: Merge, failures: Map<string, number>): Promise<number> {
  const finished = await db.sequelize.query<{ id: string }>(`
    SELECT jobs.id AS id FROM jobs
    WHERE jobs.state = 'running' AND jobs.chunksDone >= jobs.chunksTotal
      AND NOT EXISTS (SELECT 1 FROM chunks WHERE chunks.jobId = jobs.id AND chunks.finishedAt > UTC_TIMESTAMP(3) - INTERVAL ${UNMERGED_SECONDS} SECOND)
    ORDER BY jobs.id LIMIT 10`, { type: QueryTypes.SELECT })
  let merged = 0
  for (const { id } of finished) {
    if (await mergeOrCount(db, id, merge, failures)) merged++
  }
  return merged
}

async function mergeOrCount(db: Database, jobId: string, merge: Merge, failures: Map<string, number>): Promise<boolean> {
  try {
    return await mergeJob(db, jobId, merge) === 'merged'
  }
  catch (error) {
    if (!(error instanceof SolverDied)) throw error
    const count = (failures.get(jobId) ?? 0) + 1
    failures.set(jobId, count)
    if (count >= MOST_STARTS) await failMerge(db, jobId, error.message)
    return false
  }
}

/** Settles jobs that have ended while a worker of theirs was lost. */
export async function settleEnded(db: Database): Promise<number> {
  const open = await db.sequelize.query<{ id: string }>(`
    SELECT id FROM jobs WHERE state IN ('done', 'failed', 'cancelled') AND settledAt IS NULL
      AND NOT EXISTS (SELECT 1 FROM chunks WHERE chunks.jobId = jobs.id AND chunks.state = 'running') LIMIT ${AT_ONCE}`, { type: QueryTypes.SELECT })
  let settled = 0
  for (const { id } of open) {
    const done = await inTransaction(db, async (tx) => {
      if (!await settle(db, tx, id)) return false
      await announceJob(db, tx, id)
      return true
    })
    if (done) settled++
  }
  return settled
}
