import { Op } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { Database } from './database'

/** Ends the open sessions of a user, but for one if it is named. Streams of ended sessions close within seconds. */
export async function endSessions(db: Database, tx: Transaction, userId: string, except?: string): Promise<void> {
  await db.models.Session.update({ revokedAt: new Date() }, {
    where: { userId, revokedAt: { [Op.is]: null }, ...(except ? { id: { [Op.ne]: except } } : {}) }, transaction: tx,
  })
}
