import type { Transaction } from 'sequelize'
import type { Database } from './database'
import { NoLongerAdmin } from './refusals'

/**
 * Has what admins do to the people of a team happen one after the other, and checks that whoever acts is still an admin
 * when the turn comes: two who demote each other at once cannot both succeed. @throws NoLongerAdmin
 */
export async function requireActiveAdmin(db: Database, tx: Transaction, teamId: string, userId: string): Promise<void> {
  await db.models.Team.findByPk(teamId, { attributes: ['id'], lock: tx.LOCK.UPDATE, transaction: tx, rejectOnEmpty: true })
  if (await db.models.User.count({ where: { id: userId, teamId, role: 'admin', active: true }, transaction: tx }) === 0) throw new NoLongerAdmin()
}
