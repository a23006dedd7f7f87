import type { Person } from '#shared/schemas/api'
import type { Database } from '../models/database'
import type { User } from '../models/people'
import { balances, presentQuota } from '../models/quota'

/** People as an admin sees them, in the order given. */
export async function presentPeople(db: Database, users: readonly User[]): Promise<Person[]> {
  const accounts = new Map((await balances(db, users.map(user => user.id))).map(({ userId, balance }) => [userId, balance]))
  return users.map(({ id, name, email, role, active }) => ({ id, name, email, role, active, quota: presentQuota(accounts.get(id)!) }))
}
