import { Hash } from '@adonisjs/hash'
import { Scrypt } from '@adonisjs/hash/drivers/scrypt'
import type { Transaction } from 'sequelize'
import { roleSchema } from '#shared/schemas/api'
import type { JobSpec } from '#shared/schemas/job'
import type { Database } from './database'
import demo from './demo-team.json'
import { DEMO_CELLS, DEMO_JOBS } from './demoCells'
import { createPreset } from './presets'
import type { PresetPin } from './presets'
import { toMicros } from './quota'
import { submitJob } from './submit'
import { inTransaction } from './transaction'

/** Accounts of the demo and the one password they share. For the demo alone: never in a production installation. */
export const DEMO_TEAM = demo

/**
 * Adds the demo team with its people and presets, once, and queues its jobs through the same door as everyone's.
 * Picks up where an earlier, interrupted run stopped. Answers whether anything was added. `jobs: false` queues none.
 */
export async function seedDemo(db: Database, { jobs = true } = {}): Promise<boolean> {
  const added = await inTransaction(db, async (tx) => {
    if (await db.models.User.findOne({ where: { email: DEMO_TEAM.people[0]!.email }, transaction: tx })) return false
    await insertTeam(db, tx, await new Hash(new Scrypt({})).make(DEMO_TEAM.password))
    return true
  })
  let submitted = 0
  for (const { by, key, spec } of jobs ? DEMO_JOBS : []) {
    const user = await db.models.User.findOne({ where: { email: by }, rejectOnEmpty: true })
    if (await db.models.IdempotencyKey.count({ where: { userId: user.id, key } }) > 0) continue
    await submitJob(db, { userId: user.id, teamId: user.teamId, spec, idempotencyKey: key, preset: await demoPin(db, user.teamId, spec) })
    submitted++
  }
  return added || submitted > 0
}

/** The preset that a demo job's cell is. */
async function demoPin(db: Database, teamId: string, spec: JobSpec): Promise<PresetPin | null> {
  const preset = await db.models.Preset.findOne({ where: { teamId, name: spec.device.label, shared: true }, attributes: ['id', 'version'] })
  return preset && { id: preset.id, version: preset.version }
}

async function insertTeam(db: Database, tx: Transaction, passwordHash: string) {
  const { Team, User } = db.models
  const team = await Team.create({ name: DEMO_TEAM.team }, { transaction: tx })
  const people = []
  for (const { email, name, role, quotaCpuHours } of DEMO_TEAM.people) {
    people.push(await User.create({
      teamId: team.id, email, name, role: roleSchema.parse(role), passwordHash, quotaCpuMicros: toMicros(quotaCpuHours * 3600),
    }, { transaction: tx }))
  }
  const owners = people.filter(person => person.role === 'researcher')
  for (const [k, { device, note }] of DEMO_CELLS.entries()) {
    await createPreset(db, tx, { teamId: team.id, userId: owners[k % owners.length]!.id }, { name: device.label, note, shared: true, content: { device } })
  }
}
