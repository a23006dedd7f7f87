import { Op } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { StreamEvent } from '#shared/schemas/api'
import type { Database } from './database'
import { JOB_SUMMARY_COLUMNS } from './jobs'
import { presentJob, progressOf } from './present'
import { quotaOf } from './quota'

/** Who reads an event: a whole team, or one of its users. */
export interface Audience { teamId: string, userId?: string, jobId?: string }

/** Adds an event to the stream; readers see it once the transaction has committed. */
export async function appendEvent(db: Database, tx: Transaction, audience: Audience, event: StreamEvent): Promise<void> {
  const { type, ...data } = event
  await db.models.EventRow.create({
    teamId: audience.teamId, userId: audience.userId ?? null, jobId: audience.jobId ?? null, type, data: JSON.stringify(data),
  }, { transaction: tx })
}

/** Tells the team how a job stands. Does nothing for a deleted or unknown job. */
export async function announceJob(db: Database, tx: Transaction, jobId: string): Promise<void> {
  const { Job, User } = db.models
  const job = await Job.findOne({ where: { id: jobId, deletedAt: null }, attributes: [...JOB_SUMMARY_COLUMNS], transaction: tx })
  if (!job) return
  const owner = await User.findByPk(job.ownerId, { attributes: ['id', 'name'], rejectOnEmpty: true, transaction: tx })
  const running = await progressOf(db, [job], tx)
  await appendEvent(db, tx, { teamId: job.teamId, jobId }, { type: 'job', job: presentJob(job, owner, running.get(jobId) ?? 0) })
}

/** Tells the team that a job is gone. */
export async function announceDeletion(db: Database, tx: Transaction, job: { id: string, teamId: string }): Promise<void> {
  await appendEvent(db, tx, { teamId: job.teamId, jobId: job.id }, { type: 'deleted', jobId: job.id })
}

/** Tells a user the new balance. */
export async function announceQuota(db: Database, tx: Transaction, userId: string): Promise<void> {
  const user = await db.models.User.findByPk(userId, { attributes: ['id', 'teamId'], rejectOnEmpty: true, transaction: tx })
  await appendEvent(db, tx, { teamId: user.teamId, userId }, { type: 'quota', quota: await quotaOf(db, userId, tx) })
}

/** Removes events older than an hour; a reader that was away longer reads the state again instead. */
export async function pruneEvents(db: Database): Promise<number> {
  return db.models.EventRow.destroy({ where: { createdAt: { [Op.lt]: new Date(Date.now() - 3_600_000) } }, limit: 5000 })
}
