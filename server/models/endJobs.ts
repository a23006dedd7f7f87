import { Op } from 'sequelize'
import type { Database } from './database'
import { announceDeletion, announceJob } from './events'
import { settle } from './ledger'
import { inTransaction } from './transaction'

/**
 * Cancels a job that is queued or running: at once in the table, with the chunks that no worker has begun; the running
 * ones are stopped by their workers, and the last of them settles the job. Answers false when it had ended already.
 */
export async function cancelJob(db: Database, jobId: string): Promise<boolean> {
  const { Chunk, Job } = db.models
  return inTransaction(db, async (tx) => {
    const now = new Date()
    const [changed] = await Job.update({ state: 'cancelled', finishedAt: now }, { where: { id: jobId, state: ['queued', 'running'] }, transaction: tx })
    if (changed === 0) return false
    await Chunk.update({ state: 'cancelled', finishedAt: now }, { where: { jobId, state: ['ready', 'queued'] }, transaction: tx })
    await settle(db, tx, jobId)
    await announceJob(db, tx, jobId)
    return true
  })
}

/** Takes a job that has ended out of everyone's sight. Answers false when it has not ended or is gone already. */
export async function deleteJob(db: Database, job: { id: string, teamId: string }): Promise<boolean> {
  return inTransaction(db, async (tx) => {
    const [changed] = await db.models.Job.update({ deletedAt: new Date() }, {
      where: { id: job.id, state: ['done', 'failed', 'cancelled'], deletedAt: { [Op.is]: null } }, transaction: tx,
    })
    if (changed === 0) return false
    await announceDeletion(db, tx, job)
    return true
  })
}
