import type { Transaction } from 'sequelize'
import type { Database } from './database'
import { postMail } from './outbox'
import type { Balance } from './quota'
import { QUOTA_WINDOW_DAYS, toSeconds } from './quota'

/** Shares of the quota whose crossing a person is told, the larger first, in percent. */
const LEVELS = [100, 80] as const

/** The level that what is charged has risen to from below, or undefined. A quota of nothing has no levels. */
export function crossedLevel(before: Pick<Balance, 'charged' | 'limit'>, after: Pick<Balance, 'charged' | 'limit'>): 80 | 100 | undefined {
  return LEVELS.find(level => after.limit > 0 && after.charged * 100 >= level * after.limit && before.charged * 100 < level * before.limit)
}

/**
 * Tells a person by mail when what was charged within the window has just reached 80 or 100 % of the quota: once for a
 * crossing, which happens again only after use has fallen out of the window. The caller holds the user's row locked
 * since it read the balance before; `cause` names what changed it.
 */
export async function mailQuotaCrossing(db: Database, tx: Transaction, userId: string, change: { before: Balance, after: Balance, cause: string }): Promise<void> {
  const { before, after, cause } = change
  const level = crossedLevel(before, after)
  if (!level) return
  const user = await db.models.User.findByPk(userId, { attributes: ['id', 'email', 'name', 'active'], rejectOnEmpty: true, transaction: tx })
  if (!user.active) return
  await postMail(db, tx, {
    to: user.email, userId, dedupeKey: `quota${level}:${userId}:${cause}`,
    letter: {
      kind: level === 100 ? 'quota100' : 'quota80', name: user.name, windowDays: QUOTA_WINDOW_DAYS,
      limitCpuSeconds: toSeconds(after.limit), chargedCpuSeconds: toSeconds(after.charged), reservedCpuSeconds: toSeconds(after.reserved),
    },
  })
}
