import { deleteCookie, getCookie, getRequestHeader } from 'h3'
import type { H3Event } from 'h3'
import { Op, QueryTypes } from 'sequelize'
import type { OwnSession } from '#shared/schemas/accounts'
import type { Role } from '#shared/schemas/api'
import type { Settings } from '#shared/schemas/settings'
import type { Database } from '../models/database'
import { hashToken, newToken } from '../models/tokens'
import { inTransaction } from '../models/transaction'
import { HttpProblem } from './problems'
import { useServices } from './services'

/** Hours without a request, and days altogether, after which a session ends. */
export const IDLE_HOURS = 12
export const SESSION_DAYS = 30
const SEEN_SECONDS = 60

/** Who a request acts for, read from the database at each request. */
export interface Auth {
  sessionId: string
  user: { id: string, name: string, email: string, role: Role, notifyFinished: boolean, notifyFailed: boolean }
  team: { id: string, name: string }
}

declare module '#auth-utils' {
  interface SecureSessionData {
    /** Random id of the session; its SHA-256 finds the row that decides. */
    token: string
  }
}

/** Kept here because reading it from the runtime configuration goes through every variable of the environment. */
let cookie = { name: 'farpole-session', secure: true }

/** Sets what nuxt-auth-utils reads from the environment; before the first request. Under https the cookie is bound to the host. */
export function configureSessionCookie(settings: Pick<Settings, 'sessionSecret' | 'baseUrl'>, env: NodeJS.ProcessEnv): void {
  const secure = settings.baseUrl.startsWith('https:')
  cookie = { name: secure ? '__Host-farpole' : 'farpole-session', secure }
  env.NUXT_SESSION_PASSWORD = settings.sessionSecret
  env.NUXT_SESSION_NAME = cookie.name
  env.NUXT_SESSION_COOKIE_SECURE = String(secure)
}

/** Whether the request brings a session cookie, valid or not. */
export const hasSessionCookie = (event: H3Event): boolean => getCookie(event, cookie.name) !== undefined

async function readToken(event: H3Event): Promise<string | undefined> {
  if (!hasSessionCookie(event)) return undefined
  const session = await getUserSession(event)
  return session.secure?.token
}

/** The signed-in user of a request, or undefined. */
export async function authenticate(event: H3Event): Promise<Auth | undefined> {
  const token = await readToken(event)
  if (!token) return undefined
  const { db } = useServices()
  const [row] = await db.sequelize.query<{ sessionId: string, stale: number, userId: string, name: string, email: string, role: Role, notifyFinished: number, notifyFailed: number, teamId: string, teamName: string }>(`
    SELECT sessions.id AS sessionId, sessions.lastSeenAt < UTC_TIMESTAMP(3) - INTERVAL ${SEEN_SECONDS} SECOND AS stale,
      users.id AS userId, users.name, users.email, users.role, users.notifyFinished, users.notifyFailed,
      teams.id AS teamId, teams.name AS teamName
    FROM sessions JOIN users ON users.id = sessions.userId JOIN teams ON teams.id = users.teamId
    WHERE sessions.tokenHash = :tokenHash AND ${VALID}`,
  { replacements: { tokenHash: hashToken(token) }, type: QueryTypes.SELECT })
  if (!row) return undefined
  if (row.stale) await db.models.Session.update({ lastSeenAt: new Date() }, { where: { id: row.sessionId } })
  return {
    sessionId: row.sessionId,
    user: {
      id: row.userId, name: row.name, email: row.email, role: row.role,
      notifyFinished: Boolean(row.notifyFinished), notifyFailed: Boolean(row.notifyFailed),
    },
    team: { id: row.teamId, name: row.teamName },
  }
}

const VALID = `sessions.revokedAt IS NULL AND sessions.expiresAt > UTC_TIMESTAMP(3)
  AND sessions.lastSeenAt > UTC_TIMESTAMP(3) - INTERVAL ${IDLE_HOURS} HOUR AND users.active = 1`

/** Roles of those sessions among `sessionIds` that are still good. */
export async function liveSessions(db: Database, sessionIds: readonly string[]): Promise<Map<string, Role>> {
  if (sessionIds.length === 0) return new Map()
  const rows = await db.sequelize.query<{ id: string, role: Role }>(`
    SELECT sessions.id, users.role FROM sessions JOIN users ON users.id = sessions.userId
    WHERE sessions.id IN (:sessionIds) AND ${VALID}`,
  { replacements: { sessionIds: [...sessionIds] }, type: QueryTypes.SELECT })
  return new Map(rows.map(row => [row.id, row.role]))
}

/** A user's own open sessions, last used first. */
export async function ownSessions(db: Database, { user, sessionId }: Auth): Promise<OwnSession[]> {
  const rows = await db.sequelize.query<{ id: string, createdAt: Date, lastSeenAt: Date, expiresAt: Date, userAgent: string }>(`
    SELECT sessions.id, sessions.createdAt, sessions.lastSeenAt, sessions.expiresAt, sessions.userAgent
    FROM sessions JOIN users ON users.id = sessions.userId
    WHERE sessions.userId = :userId AND ${VALID} ORDER BY sessions.lastSeenAt DESC, sessions.id DESC LIMIT 200`,
  { replacements: { userId: user.id }, type: QueryTypes.SELECT })
  return rows.map(({ id, createdAt, lastSeenAt, expiresAt, userAgent }) => ({
    id, createdAt: createdAt.toISOString(), lastSeenAt: lastSeenAt.toISOString(), expiresAt: expiresAt.toISOString(), userAgent, current: id === sessionId,
  }))
}

/**
 * Opens a session under a new id and ends the one that the request came with. The user has proved to know the password of
 * `passwordHash`: when that was changed meanwhile, or the user disabled, there is no session that could outlive the change.
 * @throws HttpProblem sign-in-refused
 */
export async function openSession(event: H3Event, { id: userId, passwordHash }: { id: string, passwordHash: string }): Promise<void> {
  const { db } = useServices()
  await revoke(event)
  const { token, tokenHash } = newToken()
  const userAgent = (getRequestHeader(event, 'user-agent') ?? '').slice(0, 300)
  await inTransaction(db, async (tx) => {
    const user = await db.models.User.findOne({ where: { id: userId, passwordHash, active: true }, attributes: ['id'], lock: tx.LOCK.SHARE, transaction: tx })
    if (!user) throw new HttpProblem('sign-in-refused')
    const now = Date.now()
    await db.models.Session.create({
      tokenHash, userId, lastSeenAt: new Date(now), expiresAt: new Date(now + SESSION_DAYS * 86_400_000), userAgent,
    }, { transaction: tx })
  })
  await replaceUserSession(event, { secure: { token } })
}

/** Ends the session of a request: its row first, then the cookie. */
export async function closeSession(event: H3Event): Promise<void> {
  await revoke(event)
  deleteCookie(event, cookie.name, { path: '/', httpOnly: true, sameSite: 'lax', secure: cookie.secure })
}

async function revoke(event: H3Event): Promise<void> {
  const token = await readToken(event)
  if (!token) return
  await useServices().db.models.Session.update({ revokedAt: new Date() }, { where: { tokenHash: hashToken(token), revokedAt: { [Op.is]: null } } })
}
