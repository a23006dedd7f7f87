import { createInterface } from 'node:readline'
import { parseArgs } from 'node:util'
import { Hash } from '@adonisjs/hash'
import { Scrypt } from '@adonisjs/hash/drivers/scrypt'
import { z } from 'zod'
import { newPasswordSchema, personNameSchema } from '#shared/schemas/accounts'
import { emailSchema, roleSchema } from '#shared/schemas/api'
import { readSettings } from '#shared/schemas/settings'
import { passwordFault } from '#shared/utils/passwordRules'
import type { Database } from '../models/database'
import { closeDatabase, openDatabase } from '../models/database'
import { toMicros } from '../models/quota'
import { endSessions } from '../models/sessions'
import { inTransaction } from '../models/transaction'

const HELP = `Adds a person, or changes one who is there. The password is read from standard input.

  npm run person -- --email ADDRESS --name NAME --role researcher|student|admin --team NAME [--quota-hours HOURS]
  npm run person -- --email ADDRESS --disable
`

const personSchema = z.strictObject({
  email: emailSchema,
  name: personNameSchema,
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
  const read = newPasswordSchema.safeParse(line)
  if (!read.success) throw new Error(read.error.issues.map(issue => issue.message).join('\n'))
  return read.data
}

async function keep(db: Database, { email, name, role, team, quotaHours }: Person, password: string): Promise<string> {
  const passwordHash = await new Hash(new Scrypt({})).make(password)
  return inTransaction(db, async (transaction) => {
    const { Reset, Team, User } = db.models
    const [{ id: teamId }] = await Team.findOrCreate({ where: { name: team }, defaults: { name: team }, transaction })
    const values = { teamId, name, role, passwordHash, quotaCpuMicros: toMicros(quotaHours * 3600), active: true }
    const before = await User.findOne({ where: { email }, transaction })
    if (!before) {
      await User.create({ email, ...values }, { transaction })
      return `Added ${email} as ${role} of ${team}.`
    }
    await before.update(values, { transaction })
    await Reset.destroy({ where: { userId: before.id }, transaction })
    await endSessions(db, transaction, before.id)
    return `Changed ${email}: ${role} of ${team}, with a new password; open sessions were ended.`
  })
}

async function disable(db: Database, email: string): Promise<string> {
  return inTransaction(db, async (transaction) => {
    const user = await db.models.User.findOne({ where: { email, active: true }, transaction })
    if (!user) throw new Error(`There is no active person with the address ${email}.`)
    await user.update({ active: false }, { transaction })
    await db.models.Reset.destroy({ where: { userId: user.id }, transaction })
    await endSessions(db, transaction, user.id)
    return `Disabled ${email}; open sessions were ended.`
  })
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
  if (!read.success) throw new Error(`${read.error.issues.map(issue => `--${issue.path.join('').replace('quotaHours', 'quota-hours')}: ${issue.message}`).join('\n')}\n\n${HELP}`)
  const password = await readPassword()
  const fault = passwordFault(password, [read.data.name, read.data.email])
  if (fault) throw new Error(fault)
  return (db: Database) => keep(db, read.data, password)
}

main().catch((error: unknown) => {
  console.error(error instanceof Error ? error.message : error)
  process.exitCode = 1
})
