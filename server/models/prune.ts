import { Op } from 'sequelize'
import type { Database } from './database'

const DAY_MS = 86_400_000
/** Days for which a retry with the same key finds its job. */
export const KEY_DAYS = 7
/** Days that a session's row outlives the session. */
const ENDED_SESSION_DAYS = 30
const AT_ONCE = 5000

/** Removes keys and sessions that nothing will ask for again; answers with how many, at most some thousand at a time. */
export async function pruneOld(db: Database, now = Date.now()): Promise<{ keys: number, sessions: number }> {
  const keys = await db.models.IdempotencyKey.destroy({ where: { createdAt: { [Op.lt]: new Date(now - KEY_DAYS * DAY_MS) } }, limit: AT_ONCE })
  const ended = { [Op.lt]: new Date(now - ENDED_SESSION_DAYS * DAY_MS) }
  const sessions = await db.models.Session.destroy({ where: { [Op.or]: [{ expiresAt: ended }, { revokedAt: ended }] }, limit: AT_ONCE })
  return { keys, sessions }
}
