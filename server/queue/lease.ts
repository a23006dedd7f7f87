import { Op, literal } from 'sequelize'
import type { Database } from '../models/database'

/** Seconds for which a lease holds without being renewed. */
export const LEASE_SECONDS = 6

/**
 * Takes or renews a lease on the database's clock; answers whether `holder` has it now.
 * At most one holder has it at a time, whatever the clocks of their machines say.
 */
export async function holdLease(db: Database, name: string, holder: string): Promise<boolean> {
  const { Lease } = db.models
  const end = literal(`UTC_TIMESTAMP(3) + INTERVAL ${LEASE_SECONDS} SECOND`)
  const [renewed] = await Lease.update({ holder, expiresAt: end }, {
    where: { name, [Op.or]: [{ holder }, { expiresAt: { [Op.lt]: literal('UTC_TIMESTAMP(3)') } }] },
  })
  if (renewed > 0) return true
  // The row exists after its first day, so that this insertion is tried only while there is none.
  if (await Lease.count({ where: { name } }) > 0) return false
  await db.sequelize.query(
    `INSERT IGNORE INTO leases (name, holder, expiresAt) VALUES (:name, :holder, UTC_TIMESTAMP(3) + INTERVAL ${LEASE_SECONDS} SECOND)`,
    { replacements: { name, holder } })
  return await Lease.count({ where: { name, holder } }) > 0
}

/** Gives a lease back, so that the next one need not wait for its end. */
export async function yieldLease(db: Database, name: string, holder: string): Promise<void> {
  await db.models.Lease.update({ expiresAt: literal('UTC_TIMESTAMP(3) - INTERVAL 1 SECOND') }, { where: { name, holder } })
}
