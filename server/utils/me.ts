import type { Me } from '#shared/schemas/api'
import { calibrationOf } from '../models/calibration'
import type { Database } from '../models/database'
import { quotaOf } from '../models/quota'
import type { Auth } from './auth'
import { openJobsOf, queueOf } from './jobs'

/** What the interface needs to know of the signed-in user. */
export async function presentMe(db: Database, { user, team }: Pick<Auth, 'user' | 'team'>): Promise<Me> {
  return {
    user: {
      id: user.id, name: user.name, email: user.email, role: user.role, notifyFinished: user.notifyFinished, notifyFailed: user.notifyFailed,
    },
    team: { id: team.id, name: team.name },
    quota: await quotaOf(db, user.id),
    calibration: await calibrationOf(db),
    queue: await queueOf(db),
    openJobs: await openJobsOf(db, user.id),
  }
}
