import { createInterface } from 'node:readline'
import { parseArgs } from 'node:util'
import { Hash } from '@adonisjs/hash'
import { Scrypt } from '@adonisjs/hash/drivers/scrypt'
import { z } from 'zod'
import { roleSchema } from '#shared/schemas/api'
import { readSettings } from '#shared/schemas/settings'
import type { Database } from '../models/database'
import { closeDatabase, openDatabase } from '../models/database'
import { toMicros } from '../models/quota'
import { inTransaction } from '../models/transaction'

const HELP = `Adds a person, or changes one who is there. The password is read from standard input.

  npm run person -- --email ADDRESS --name NAME --role researcher|student|admin --team NAME [--quota-hours HOURS]
  npm run person -- --email ADDRESS --disable
`
const PASSWORD_LENGTH = 12

const personSchema = z.strictObject({
  email: z.string().trim().toLowerCase().max(254).pipe(z.email({ error: 'is not an e-mail address' })),
  name: z.string().trim().min(1, { error: 'is missing' }).max(120),
  role: roleSchema,
  team: z.string().trim().min(1, { error: 'is missing' }).max(80),
  quotaHours: z.number({ error: 'is not a number of hours' }).min(0).max(1e5),
})
type Person = z.infer<typeof personSchema>

/** Reads one line; on a terminal it is asked for and not shown. */
async function readPassword(): Promise<string> {
  const terminal = process.stdin.isTTY
  if (terminal) process.stderr.write('Password: ')
  const lines = createInterface({ input: process.stdin, terminal })
  const [line = ''] = await new Promise<string[]>((resolve) => {
    lines.once('line', text => resolve([text])).once('close', () => resolve([]))
  })
  lines.close()
  if (terminal) process.stderr.write('\n')
  if (line.length < PASSWORD_LENGTH) throw new Error(`A password has at least ${PASSWORD_LENGTH} characters.`)
  return line
}

async function keep(db: Database, { email, name, role, team, quotaHours }: Person, password: string): Promise<string> {
  const passwordHash = await new Hash(new Scrypt({})).make(password)
  return inTransaction(db, async (transaction) => {
    const { Session, Team, User } = db.models
    const [{ id: teamId }] = await Team.findOrCreate({ where: { name: team }, defaults: { name: team }, transaction })
    const values = { teamId, name, role, passwordHash, quotaCpuMicros: toMicros(quotaHours * 3600), active: true }
    const before = await User.findOne({ where: { email }, transaction })
    if (!before) {
      await User.create({ email, ...values }, { transaction })
      return `Added ${email} as ${role} of ${team}.`
    }
    await before.update(values, { transaction })
    await Session.update({ revokedAt: new Date() }, { where: { userId: before.id, revokedAt: null }, transaction })
    return `Changed ${email}: ${role} of ${team}, with a new password; open sessions were ended.`
  })
}

async function disable(db: Database, email: string): Promise<string> {
  const [changed] = await db.models.User.update({ active: false }, { where: { email } })
  if (changed === 0) throw new Error(`There is no active person with the address ${email}.`)
  return `Disabled ${email}; open sessions end at their next request.`
}

async function main() {
  const { values } = parseArgs({ options: {
    'email': { type: 'string' }, 'name': { type: 'string' }, 'role': { type: 'string' }, 'team': { type: 'string' },
    'quota-hours': { type: 'string', default: '20' }, 'disable': { type: 'boolean' }, 'help': { type: 'boolean', short: 'h' },
  } })
  if (values.help || !values.email) return console.log(HELP)
  const settings = readSettings(process.env)
  const act = values.disable ? (db: Database) => disable(db, values.email!.trim().toLowerCase()) : await additionOf(values)
  const db = openDatabase(settings.database)
  try {
    console.log(await act(db))
  }
  finally {
    await closeDatabase(db)
  }
}

async function additionOf(values: { 'email'?: string, 'name'?: string, 'role'?: string, 'team'?: string, 'quota-hours': string }) {
  const { email, name, role, team } = values
  const read = personSchema.safeParse({ email, name, role, team, quotaHours: values['quota-hours'].trim() === '' ? undefined : Number(values['quota-hours']) })
  if (!read.success) throw new Error(`${read.error.issues.map(issue => `--${issue.path.join('').replace('quotaHours', 'quota-hours')} ${issue.message}`).join('\n')}\n\n${HELP}`)
  const password = await readPassword()
  return (db: Database) => keep(db, read.data, password)
}

main().catch((error: unknown) => {
  console.error(error instanceof Error ? error.message : error)
  process.exitCode = 1
})
