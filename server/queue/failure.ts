import { literal } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { Database } from '../models/database'
import { announceJob } from '../models/events'
import { mailJobEnd } from '../models/jobMail'
import { settle } from '../models/ledger'

const LONGEST_REASON = 1000

/**
 * Ends an unfinished job as failed, with the reason in words for its owner: what waits is cancelled, what runs is noticed
 * by its workers, and the job is settled when none of it runs. The caller holds the job's row locked.
 */
export async function endJobAsFailed(db: Database, tx: Transaction, jobId: string, reason: string): Promise<void> {
  const { Chunk, Job } = db.models
  const [ended] = await Job.update({ state: 'failed', error: reason.slice(0, LONGEST_REASON), finishedAt: literal('UTC_TIMESTAMP(3)') }, {
    where: { id: jobId, state: ['queued', 'running'] }, transaction: tx,
  })
  if (ended === 0) return
  await Chunk.update({ state: 'cancelled' }, { where: { jobId, state: ['ready', 'queued'] }, transaction: tx })
  await settle(db, tx, jobId)
  await mailJobEnd(db, tx, jobId)
  await announceJob(db, tx, jobId)
}
