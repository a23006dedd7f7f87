import { QueryTypes } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { Quota, Role } from '#shared/schemas/api'
import type { Database } from './database'

/** Days over which use counts against a user's quota. */
export const QUOTA_WINDOW_DAYS = 30

/** CPU-seconds in the window that a person starts with, by role; an admin changes it. Students queue nothing. */
export const FIRST_QUOTA_CPU_SECONDS: Record<Role, number> = { researcher: 20 * 3600, admin: 20 * 3600, student: 0 }

const MICROS = 1e6

/** A user's account in CPU microseconds; `left` is never negative. */
export interface Balance { limit: number, charged: number, reserved: number, left: number }

/** CPU-seconds to the microsecond that the ledger counts in. */
export const toMicros = (seconds: number) => Math.round(seconds * MICROS)
/** Microseconds of the ledger to CPU-seconds. */
export const toSeconds = (micros: number) => micros / MICROS

/** Reads a user's account. Throws when there is no such user. */
export async function balanceOf(db: Database, userId: string, tx?: Transaction): Promise<Balance> {
  const [row] = await balances(db, [userId], tx)
  if (!row) throw new Error('No such user.')
  return row.balance
}

/** Reads the accounts of several users at once, in no particular order. */
export async function balances(db: Database, userIds: readonly string[], tx?: Transaction): Promise<{ userId: string, balance: Balance }[]> {
  if (userIds.length === 0) return []
  const rows = await db.sequelize.query<{ id: string, quota: number, charged: number, reserved: number }>(`
    SELECT users.id AS id, users.quotaCpuMicros AS quota,
      CAST(COALESCE(SUM(CASE WHEN ledger.kind = 'charge' THEN ledger.cpuMicros END), 0) AS SIGNED) AS charged,
      CAST(COALESCE(SUM(CASE WHEN ledger.kind <> 'charge' THEN ledger.cpuMicros END), 0) AS SIGNED) AS reserved
    FROM users
    LEFT JOIN ledger ON ledger.userId = users.id AND ledger.effectiveAt > UTC_TIMESTAMP(3) - INTERVAL ${QUOTA_WINDOW_DAYS} DAY
    WHERE users.id IN (:userIds)
    GROUP BY users.id, users.quotaCpuMicros`,
  { replacements: { userIds: [...userIds] }, type: QueryTypes.SELECT, transaction: tx ?? null })
  return rows.map(({ id, quota, charged, reserved: sum }) => {
    const reserved = Math.max(0, sum)
    return { userId: id, balance: { limit: quota, charged, reserved, left: Math.max(0, quota - charged - reserved) } }
  })
}

/** A balance as the API shows it, in CPU-seconds. */
export function presentQuota({ limit, charged, reserved, left }: Balance): Quota {
  return {
    limit: toSeconds(limit), charged: toSeconds(charged), reserved: toSeconds(reserved), left: toSeconds(left), windowDays: QUOTA_WINDOW_DAYS,
  }
}

/** A user's quota in CPU-seconds over the rolling window. */
export async function quotaOf(db: Database, userId: string, tx?: Transaction): Promise<Quota> {
  return presentQuota(await balanceOf(db, userId, tx))
}
