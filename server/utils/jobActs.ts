import { createHash } from 'node:crypto'
import { Op } from 'sequelize'
import { cancelJob, deleteJob } from '../models/endJobs'
import type { Database } from '../models/database'
import type { Job } from '../models/jobs'
import { visibleTo } from '../models/presets'
import type { PresetPin } from '../models/presets'
import { specOf } from '../models/results'
import { submitJob } from '../models/submit'
import type { Auth } from './auth'
import { findTeamJob, requireOwner } from './jobs'
import { HttpProblem } from './problems'

// What the commands for one job and for many do alike.

/** Cancels a job that waits or runs; one that is cancelled already is no error. @throws HttpProblem not-found, forbidden, conflict */
export async function cancelFor(db: Database, auth: Auth, id: string): Promise<Job> {
  requireOwner(auth, await findTeamJob(db, auth, id))
  const changed = await cancelJob(db, id)
  const job = await findTeamJob(db, auth, id)
  if (!changed && job.state !== 'cancelled') throw new HttpProblem('conflict', { detail: 'This job has ended already.' })
  return job
}

/** Deletes a job that has ended. @throws HttpProblem not-found, forbidden, conflict */
export async function deleteFor(db: Database, auth: Auth, id: string): Promise<void> {
  const job = await findTeamJob(db, auth, id)
  requireOwner(auth, job)
  if (!await deleteJob(db, job)) throw new HttpProblem('conflict', { detail: 'This job has not ended. Cancel it first.' })
}

/**
 * Queues a job of the team again under a new seed, for the reader and at the reader's cost; answers the new job's id. Seed and
 * key follow from `key` and the job, so that the same command given twice makes one job.
 * @throws HttpProblem not-found, and what submitting throws
 */
export async function rerunFor(db: Database, auth: Auth, id: string, key: string): Promise<string> {
  const job = await findTeamJob(db, auth, id)
  const spec = specOf(job)
  const digest = createHash('sha256').update(`rerun ${key} ${id}`).digest()
  const drawn = digest.readUInt32BE(0)
  const seed = drawn === spec.numerics.seed ? (drawn + 1) % 2 ** 32 : drawn
  const { jobId } = await submitJob(db, {
    userId: auth.user.id, teamId: auth.team.id, spec: { ...spec, numerics: { ...spec.numerics, seed } }, idempotencyKey: `rerun-${digest.toString('hex')}`,
    preset: await pinFor(db, auth, job),
  })
  return jobId
}

/** The job's preset, where the reader may see it. */
async function pinFor(db: Database, { user, team }: Auth, { presetId, presetVersion }: Job): Promise<PresetPin | null> {
  if (presetId === null || presetVersion === null) return null
  const seen = await db.models.Preset.count({ where: { [Op.and]: [{ id: presetId }, visibleTo({ userId: user.id, teamId: team.id })] } })
  return seen > 0 ? { id: presetId, version: presetVersion } : null
}
