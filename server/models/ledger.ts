import { QueryTypes } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { Database } from './database'
import { announceQuota } from './events'
import { balanceOf } from './quota'
import { mailQuotaCrossing } from './quotaMail'

/**
 * Reserves a job's price. The caller's transaction holds the user's row locked, has compared the price with
 * `balanceOf`, and has inserted the job.
 */
export async function reserve(db: Database, tx: Transaction, entry: { userId: string, jobId: string, cpuMicros: number }): Promise<void> {
  await db.models.LedgerEntry.create({ ...entry, kind: 'reserve', effectiveAt: new Date() }, { transaction: tx })
}

/**
 * Settles a finished job: releases its reservation and charges what its owner owes, once.
 * Charged are successful attempts, what cancelled ones had used and what those had that the job's own limits or numbers ended;
 * attempts lost to faults of the service are not.
 * Answers false, and changes nothing, when the job is settled already, has not ended or still has a chunk running.
 * Locks the job's row, then its owner's.
 */
export async function settle(db: Database, tx: Transaction, jobId: string): Promise<boolean> {
  const { Chunk, Job, LedgerEntry, User } = db.models
  const job = await Job.findByPk(jobId, { attributes: ['id', 'ownerId', 'state', 'settledAt'], lock: tx.LOCK.UPDATE, transaction: tx })
  if (!job || job.settledAt || job.state === 'queued' || job.state === 'running') return false
  if (await Chunk.count({ where: { jobId, state: 'running' }, transaction: tx }) > 0) return false
  const reservation = await LedgerEntry.findOne({ where: { jobId, kind: 'reserve' }, transaction: tx })
  if (!reservation) throw new Error(`Job ${jobId} has no reservation.`)
  // Jobs of one user settle one after the other, so that exactly one of them sees the balance cross a level.
  await User.findByPk(job.ownerId, { attributes: ['id'], lock: tx.LOCK.UPDATE, transaction: tx })
  const before = await balanceOf(db, job.ownerId, tx)
  const now = new Date()
  await LedgerEntry.create({
    userId: job.ownerId, jobId, kind: 'release', cpuMicros: -reservation.cpuMicros, effectiveAt: reservation.effectiveAt,
  }, { transaction: tx })
  const cpuMicros = await owed(db, tx, jobId)
  await LedgerEntry.create({ userId: job.ownerId, jobId, kind: 'charge', cpuMicros, effectiveAt: now }, { transaction: tx })
  await job.update({ settledAt: now }, { transaction: tx })
  const after = { ...before, charged: before.charged + cpuMicros, reserved: Math.max(0, before.reserved - reservation.cpuMicros) }
  await mailQuotaCrossing(db, tx, job.ownerId, { before, after, cause: jobId })
  await announceQuota(db, tx, job.ownerId)
  return true
}

/** CPU microseconds of a job's successful attempts (the one whose result stands), of its cancelled ones and of those that failed by its own doing. */
async function owed(db: Database, tx: Transaction, jobId: string): Promise<number> {
  const [row] = await db.sequelize.query<{ owed: number }>(`
    SELECT CAST(COALESCE(SUM(attempts.cpuMicros), 0) AS SIGNED) AS owed
    FROM chunks JOIN attempts ON attempts.chunkId = chunks.id
    WHERE chunks.jobId = :jobId AND (
      attempts.outcome IN ('cancelled', 'failed')
      OR (attempts.outcome = 'done' AND chunks.state = 'done' AND attempts.attempt = chunks.attempt))`,
  { replacements: { jobId }, type: QueryTypes.SELECT, transaction: tx })
  return row?.owed ?? 0
}
