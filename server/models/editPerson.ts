import { Op } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { PersonEdit } from '#shared/schemas/accounts'
import type { Database } from './database'
import { announceQuota } from './events'
import type { User } from './people'
import { balanceOf, toMicros } from './quota'
import { mailQuotaCrossing } from './quotaMail'
import { InTheWay } from './refusals'
import { endSessions } from './sessions'
import { requireActiveAdmin } from './teamLock'
import { inTransaction } from './transaction'

/**
 * Changes quota, role or state of a person as an admin of the team. Role and state count at the person's next request;
 * open streams close within seconds. Answers false when the team has no such person.
 * @throws InTheWay where it would leave the team without an active admin, NoLongerAdmin
 */
export async function editPerson(db: Database, by: { id: string, teamId: string }, id: string, edit: PersonEdit): Promise<boolean> {
  return inTransaction(db, async (tx) => {
    await requireActiveAdmin(db, tx, by.teamId, by.id)
    const user = await db.models.User.findOne({ where: { id, teamId: by.teamId }, lock: tx.LOCK.UPDATE, transaction: tx })
    if (!user) return false
    const { role = user.role, active = user.active } = edit
    if (user.role === 'admin' && user.active && (role !== 'admin' || !active)) await requireAnotherAdmin(db, tx, user)
    if (!active && user.active) {
      await endSessions(db, tx, id)
      await db.models.Reset.destroy({ where: { userId: id }, transaction: tx })
    }
    await user.update({ role, active }, { transaction: tx })
    if (edit.quotaCpuSeconds !== undefined && edit.reason !== undefined) {
      await changeQuota(db, tx, user, { byId: by.id, toCpuMicros: toMicros(edit.quotaCpuSeconds), reason: edit.reason })
    }
    return true
  })
}

async function requireAnotherAdmin(db: Database, tx: Transaction, user: User): Promise<void> {
  const others = await db.models.User.count({ where: { teamId: user.teamId, role: 'admin', active: true, id: { [Op.ne]: user.id } }, transaction: tx })
  if (others === 0) throw new InTheWay('This is the last active admin of the team. Make somebody else an admin first.')
}

async function changeQuota(db: Database, tx: Transaction, user: User, change: { byId: string, toCpuMicros: number, reason: string }): Promise<void> {
  const before = await balanceOf(db, user.id, tx)
  if (before.limit === change.toCpuMicros) return
  const { id } = await db.models.QuotaChange.create({ userId: user.id, fromCpuMicros: before.limit, ...change }, { transaction: tx })
  await user.update({ quotaCpuMicros: change.toCpuMicros }, { transaction: tx })
  await mailQuotaCrossing(db, tx, user.id, { before, after: { ...before, limit: change.toCpuMicros }, cause: `change${id}` })
  await announceQuota(db, tx, user.id)
}
