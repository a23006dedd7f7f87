import { Op, UniqueConstraintError } from 'sequelize'
import type { Transaction } from 'sequelize'
import { INVITATION_DAYS } from '#shared/schemas/accounts'
import type { InvitationSeen } from '#shared/schemas/accounts'
import type { Role } from '#shared/schemas/api'
import type { Invitation } from './accounts'
import type { Database } from './database'
import { postMail, withdrawMail } from './outbox'
import type { User } from './people'
import { FIRST_QUOTA_CPU_SECONDS, toMicros } from './quota'
import { InTheWay, LinkNotValid } from './refusals'
import { requireActiveAdmin } from './teamLock'
import { hashToken, newToken } from './tokens'
import { inTransaction } from './transaction'

const DAY_MS = 86_400_000
const mailKey = (invitationId: string) => `invitation:${invitationId}`

export interface Inviting { teamId: string, teamName: string, byId: string, byName: string, email: string, role: Role }

/**
 * Invites an address to a team in a role. The link in the mail works once, for this address and role alone; it takes the
 * place of an earlier one. @throws InTheWay when the address has an account, NoLongerAdmin
 */
export async function invite(db: Database, { teamId, teamName, byId, byName, email, role }: Inviting): Promise<Invitation> {
  return inTransaction(db, async (tx) => {
    await requireActiveAdmin(db, tx, teamId, byId)
    await requireNoAccount(db, tx, email, teamId)
    const earlier = await db.models.Invitation.findOne({ where: { teamId, email }, transaction: tx })
    if (earlier) await remove(db, tx, earlier)
    const { token, tokenHash } = newToken()
    const expiresAt = new Date(Date.now() + INVITATION_DAYS * DAY_MS)
    const row = await db.models.Invitation.create({ teamId, email, role, tokenHash, invitedById: byId, expiresAt }, { transaction: tx })
    await postMail(db, tx, {
      to: email, dedupeKey: mailKey(row.id), expiresAt,
      letter: { kind: 'invitation', token, team: teamName, role, invitedBy: byName, expiresAt: expiresAt.toISOString() },
    })
    return row
  })
}

/** Takes an invitation back. Answers false when the team has none of this id. */
export async function withdrawInvitation(db: Database, teamId: string, id: string): Promise<boolean> {
  return inTransaction(db, async (tx) => {
    const row = await db.models.Invitation.findOne({ where: { id, teamId }, lock: tx.LOCK.UPDATE, transaction: tx })
    if (row) await remove(db, tx, row)
    return row !== null
  })
}

/** What an invitation offers. @throws LinkNotValid */
export async function lookAtInvitation(db: Database, token: string): Promise<InvitationSeen> {
  const row = await findValid(db, token)
  const team = await db.models.Team.findByPk(row.teamId, { rejectOnEmpty: true })
  return { email: row.email, role: row.role, team: team.name }
}

/** Makes the account that an invitation offers, and uses the invitation up. Answers the new user. @throws LinkNotValid, InTheWay */
export async function acceptInvitation(db: Database, token: string, { name, passwordHash }: { name: string, passwordHash: string }): Promise<User> {
  return inTransaction(db, async (tx) => {
    const row = await findValid(db, token, tx)
    await requireNoAccount(db, tx, row.email)
    const { email, role, teamId } = row
    await row.destroy({ transaction: tx })
    return db.models.User.create({
      teamId, email, name, role, passwordHash, quotaCpuMicros: toMicros(FIRST_QUOTA_CPU_SECONDS[role]),
    }, { transaction: tx }).catch((error: unknown) => {
      // Another team's invitation for the same address was accepted at the same moment.
      throw error instanceof UniqueConstraintError ? new InTheWay(`${email} has an account already.`) : error
    })
  })
}

async function findValid(db: Database, token: string, tx?: Transaction): Promise<Invitation> {
  const row = await db.models.Invitation.findOne({
    where: { tokenHash: hashToken(token), expiresAt: { [Op.gt]: new Date() } }, ...(tx ? { lock: tx.LOCK.UPDATE, transaction: tx } : {}),
  })
  if (!row) throw new LinkNotValid()
  return row
}

async function remove(db: Database, tx: Transaction, row: Invitation): Promise<void> {
  await row.destroy({ transaction: tx })
  await withdrawMail(db, tx, mailKey(row.id))
}

async function requireNoAccount(db: Database, tx: Transaction, email: string, teamId?: string): Promise<void> {
  const user = await db.models.User.findOne({ where: { email }, attributes: ['teamId', 'active'], transaction: tx })
  if (!user) return
  throw new InTheWay(user.teamId === teamId && !user.active
    ? `${email} has an account in your team that is disabled. Enable it instead.`
    : `${email} has an account already.`)
}
