import type { Transaction } from 'sequelize'
import { z } from 'zod'
import type { Database } from './database'
import { postMail } from './outbox'
import { toSeconds } from './quota'

/** Of an answer, which may be large, its words alone. */
const wordsSchema = z.looseObject({ words: z.looseObject({ headline: z.string(), detail: z.string(), cautions: z.array(z.string()) }) })

/** Tells a job's owner by mail that it is done or has failed, if that is wanted. The caller's transaction has ended the job. */
export async function mailJobEnd(db: Database, tx: Transaction, jobId: string): Promise<void> {
  const { Job, User } = db.models
  const job = await Job.findByPk(jobId, {
    attributes: ['id', 'ownerId', 'state', 'sentence', 'answer', 'error', 'cpuMicros'], rejectOnEmpty: true, transaction: tx,
  })
  const owner = await User.findByPk(job.ownerId, { attributes: ['id', 'email', 'name', 'active', 'notifyFinished', 'notifyFailed'], rejectOnEmpty: true, transaction: tx })
  const about = { name: owner.name, jobId, sentence: job.sentence }
  if (!owner.active) return
  const posting = { to: owner.email, userId: owner.id, dedupeKey: `job:${jobId}:${job.state}` }
  if (job.state === 'done' && owner.notifyFinished) {
    const { headline, detail, cautions } = wordsSchema.parse(JSON.parse(job.answer ?? '')).words
    await postMail(db, tx, { ...posting, letter: { kind: 'jobFinished', ...about, headline, detail, cautions, cpuSeconds: toSeconds(job.cpuMicros) } })
  }
  if (job.state === 'failed' && owner.notifyFailed) {
    await postMail(db, tx, { ...posting, letter: { kind: 'jobFailed', ...about, reason: job.error ?? '' } })
  }
}
