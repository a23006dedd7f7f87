import { QueryTypes } from 'sequelize'
import type { Person } from '#shared/schemas/accounts'
import type { Database } from '../models/database'
import type { User } from '../models/people'
import { loadsByUser } from '../models/queueUse'
import { balances, presentQuota } from '../models/quota'

/** People as an admin sees them, in the order given. */
export async function presentPeople(db: Database, users: readonly User[]): Promise<Person[]> {
  const ids = users.map(user => user.id)
  const accounts = new Map((await balances(db, ids)).map(({ userId, balance }) => [userId, presentQuota(balance)]))
  const loads = new Map((await loadsByUser(db)).map(load => [load.userId, load]))
  const seen = await lastSeen(db, ids)
  return users.map(({ id, name, email, role, active }) => {
    const quota = accounts.get(id)!
    return {
      id, name, email, role, state: active ? 'active' : 'disabled', quota, usedCpuSeconds: quota.charged,
      runningChunks: loads.get(id)?.runningChunks ?? 0, waitingJobs: loads.get(id)?.waitingJobs ?? 0, lastSeenAt: seen.get(id)?.toISOString() ?? null,
    }
  })
}

async function lastSeen(db: Database, userIds: readonly string[]): Promise<Map<string, Date>> {
  if (userIds.length === 0) return new Map()
  const rows = await db.sequelize.query<{ userId: string, at: Date }>('SELECT userId, MAX(lastSeenAt) AS at FROM sessions WHERE userId IN (:userIds) GROUP BY userId',
    { replacements: { userIds: [...userIds] }, type: QueryTypes.SELECT })
  return new Map(rows.map(({ userId, at }) => [userId, at]))
}

/** Reads the names of users; answers how to name each by its id. */
export async function namesOf(db: Database, userIds: readonly string[]): Promise<(id: string) => { id: string, name: string }> {
  const users = await db.models.User.findAll({ where: { id: [...new Set(userIds)] }, attributes: ['id', 'name'] })
  const names = new Map(users.map(user => [user.id, user.name]))
  return id => ({ id, name: names.get(id) ?? '' })
}
