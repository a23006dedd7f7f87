import { Hash } from '@adonisjs/hash'
import { Scrypt } from '@adonisjs/hash/drivers/scrypt'
import type { Role } from '#shared/schemas/api'
import demo from '../../server/models/demo-team.json'
import type { Database } from '../../server/models/database'
import { newId } from '../../server/models/id'
import type { User } from '../../server/models/people'

let hash: Promise<string> | undefined

/** Adds a user with the demo's password, to a new team unless one is given. The quota is in CPU-seconds. */
export async function addUser(db: Database, { role = 'researcher', quota = 3600, teamId }: { role?: Role, quota?: number, teamId?: string } = {}): Promise<User> {
  hash ??= new Hash(new Scrypt({})).make(demo.password)
  const team = teamId ?? (await db.models.Team.create({ name: 'Second lab' })).id
  return db.models.User.create({
    teamId: team, email: `${newId().toLowerCase()}@example.org`, name: 'Ansel Moor', role, passwordHash: await hash, quotaCpuMicros: quota * 1e6,
  })
}

/** The address of a user as `signIn` takes it. */
export const addressOf = (user: User) => user.email as `${string}@${string}`
