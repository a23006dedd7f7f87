import { Op } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { Database } from './database'

/** Ends all open sessions of a user. Their streams close within seconds. */
export async function endSessions(db: Database, tx: Transaction, userId: string): Promise<void> {
  await db.models.Session.update({ revokedAt: new Date() }, { where: { userId, revokedAt: { [Op.is]: null } }, transaction: tx })
}
