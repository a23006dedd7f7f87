import { Op, QueryTypes } from 'sequelize'
import type { Transaction } from 'sequelize'
import { RESET_MINUTES } from '#shared/schemas/accounts'
import type { Database } from './database'
import { postMail } from './outbox'
import type { User } from './people'
import { LinkNotValid } from './refusals'
import { endSessions } from './sessions'
import { hashToken, newToken } from './tokens'
import { inTransaction } from './transaction'

const AT_ONCE = 100
/** Seconds in which one user gets one mail at most, and most mails an hour, however often somebody asks. */
const PAUSE_SECONDS = 60
const MOST_AN_HOUR = 5

/**
 * Notes that somebody wants a new password for an address. It asks nothing of the table of users, so that neither the
 * answer nor the time that it takes can tell whether the address has an account: `grantResets` looks later.
 */
export async function wishForReset(db: Database, email: string): Promise<void> {
  await db.sequelize.query('INSERT INTO resetWishes (email, requestedAt) VALUES (:email, UTC_TIMESTAMP(3)) ON DUPLICATE KEY UPDATE requestedAt = requestedAt',
    { replacements: { email }, type: QueryTypes.INSERT })
}

/** Turns wishes of active users into mails with a link, and forgets the others. Answers how many were granted. */
export async function grantResets(db: Database): Promise<number> {
  const wishes = await db.sequelize.query<{ email: string }>(`SELECT email FROM resetWishes ORDER BY requestedAt LIMIT ${AT_ONCE}`, { type: QueryTypes.SELECT })
  let granted = 0
  for (const { email } of wishes) {
    if (await inTransaction(db, tx => grant(db, tx, email))) granted++
  }
  return granted
}

async function grant(db: Database, tx: Transaction, email: string): Promise<boolean> {
  const user = await db.models.User.findOne({ where: { email, active: true }, attributes: ['id', 'email', 'name'], lock: tx.LOCK.UPDATE, transaction: tx })
  // Whoever deletes the wish fulfils it: two processes that do this at once grant it once.
  const taken = await db.sequelize.query('DELETE FROM resetWishes WHERE email = :email', { replacements: { email }, type: QueryTypes.BULKDELETE, transaction: tx })
  if (taken === 0 || !user || await mailedEnough(db, tx, user)) return false
  const { token, tokenHash } = newToken()
  const expiresAt = new Date(Date.now() + RESET_MINUTES * 60_000)
  await db.models.Reset.destroy({ where: { userId: user.id }, transaction: tx })
  await db.models.Reset.create({ userId: user.id, tokenHash, expiresAt }, { transaction: tx })
  await postMail(db, tx, {
    to: user.email, userId: user.id, dedupeKey: `reset:${tokenHash}`, expiresAt,
    letter: { kind: 'reset', token, name: user.name, validMinutes: RESET_MINUTES },
  })
  return true
}

async function mailedEnough(db: Database, tx: Transaction, user: User): Promise<boolean> {
  const since = (seconds: number) => db.models.Mail.count({
    where: { userId: user.id, kind: 'reset', createdAt: { [Op.gt]: new Date(Date.now() - seconds * 1000) } }, transaction: tx,
  })
  return await since(PAUSE_SECONDS) > 0 || await since(3600) >= MOST_AN_HOUR
}

/** The user whose reset link this is. @throws LinkNotValid */
export async function resetOwner(db: Database, token: string): Promise<User> {
  const row = await db.models.Reset.findOne({ where: { tokenHash: hashToken(token), expiresAt: { [Op.gt]: new Date() } } })
  const user = row && await db.models.User.findOne({ where: { id: row.userId, active: true } })
  if (!user) throw new LinkNotValid()
  return user
}

/** Sets the password that the owner of a link has chosen, uses the link up and ends all sessions. @throws LinkNotValid */
export async function confirmReset(db: Database, token: string, passwordHash: string): Promise<void> {
  await inTransaction(db, async (tx) => {
    const row = await db.models.Reset.findOne({ where: { tokenHash: hashToken(token), expiresAt: { [Op.gt]: new Date() } }, lock: tx.LOCK.UPDATE, transaction: tx })
    if (!row) throw new LinkNotValid()
    await row.destroy({ transaction: tx })
    const [changed] = await db.models.User.update({ passwordHash }, { where: { id: row.userId, active: true }, transaction: tx })
    if (changed === 0) throw new LinkNotValid()
    await endSessions(db, tx, row.userId)
  })
}

/** Sets a user's password in place of the one with this hash, and ends all sessions and an open reset. Answers false when it was changed meanwhile. */
export async function changePassword(db: Database, { userId, from, to }: { userId: string, from: string, to: string }): Promise<boolean> {
  return inTransaction(db, async (tx) => {
    const [changed] = await db.models.User.update({ passwordHash: to }, { where: { id: userId, passwordHash: from }, transaction: tx })
    if (changed === 0) return false
    await db.models.Reset.destroy({ where: { userId }, transaction: tx })
    await endSessions(db, tx, userId)
    return true
  })
}
