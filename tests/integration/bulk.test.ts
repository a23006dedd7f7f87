import { randomUUID } from 'node:crypto'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { problemSchema } from '#shared/schemas/api'
import { bulkReplySchema } from '#shared/schemas/jobList'
import type { BulkAction, BulkResult } from '#shared/schemas/jobList'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { newId } from '../../server/models/id'
import type { User } from '../../server/models/people'
import { addUser, addressOf } from '../support/people'
import type { Client } from './harness'
import { finished, openTestDatabase, readJob, signIn, submit, switchingSpec } from './harness'

let db: Database
let owner: User
let mine: Client
let colleague: Client
let colleagueUser: User
let admin: Client
let student: Client
let stranger: Client

beforeAll(async () => {
  db = openTestDatabase()
  owner = await addUser(db, { quota: 72_000 })
  const { teamId } = owner
  mine = await signIn(addressOf(owner))
  colleagueUser = await addUser(db, { teamId })
  colleague = await signIn(addressOf(colleagueUser))
  admin = await signIn(addressOf(await addUser(db, { teamId, role: 'admin' })))
  student = await signIn(addressOf(await addUser(db, { teamId, role: 'student' })))
  stranger = await signIn(addressOf(await addUser(db)))
})
afterAll(() => closeDatabase(db))

const send = (as: Client, ids: string[], action: BulkAction, key: string = randomUUID()) => as.post('/api/jobs/bulk', { ids, action }, { 'Idempotency-Key': key })
async function bulk(as: Client, ids: string[], action: BulkAction, key?: string): Promise<BulkResult[]> {
  const reply = await send(as, ids, action, key)
  if (reply.status !== 200) throw new Error(`${action} answered ${reply.status}: ${await reply.text()}`)
  return bulkReplySchema.parse(await reply.json()).results
}
const told = (results: BulkResult[]) => results.map(({ ok, problem }) => ok ? 'ok' : problem?.type)
const long = () => submit(mine, switchingSpec({ trials: 800_000, seed: Math.floor(Math.random() * 1e9) }))
const short = (seed = 1) => submit(mine, switchingSpec({ trials: 20, seed }))

describe('many jobs at once', () => {
  it('are cancelled and deleted one by one, each answered for itself in the order asked', async () => {
    const ended = await short()
    await finished(mine, ended.id)
    const running = await long()
    const unknown = newId()
    const results = await bulk(mine, [running.id, unknown, ended.id], 'cancel')
    expect(results.map(({ id }) => id)).toEqual([running.id, unknown, ended.id])
    expect(told(results)).toEqual(['ok', 'not-found', 'conflict'])
    expect(told(await bulk(mine, [running.id], 'cancel'))).toEqual(['ok'])
    const open = await long()
    expect(told(await bulk(mine, [ended.id, open.id, running.id], 'delete'))).toEqual(['ok', 'conflict', 'ok'])
    expect((await mine.get(`/api/jobs/${ended.id}`)).status).toBe(404)
    expect(told(await bulk(mine, [ended.id], 'delete'))).toEqual(['not-found'])
    await bulk(mine, [open.id], 'cancel')
  })

  it('follow the rules of the single command for everyone', async () => {
    const job = await long()
    expect((await send(student, [job.id], 'cancel')).status).toBe(403)
    expect(told(await bulk(stranger, [job.id], 'cancel'))).toEqual(['not-found'])
    expect(told(await bulk(stranger, [job.id], 'rerun'))).toEqual(['not-found'])
    for (const action of ['cancel', 'delete'] as const) expect(told(await bulk(colleague, [job.id], action))).toEqual(['forbidden'])
    expect((await readJob(mine, job.id)).state).toMatch(/queued|running/)
    expect(told(await bulk(admin, [job.id], 'cancel'))).toEqual(['ok'])
    expect((await readJob(mine, job.id)).state).toBe('cancelled')
    expect(told(await bulk(admin, [job.id], 'delete'))).toEqual(['ok'])
  })

  it.each([
    ['none', { ids: [], action: 'cancel' }], ['one twice', { ids: ['01ARZ3NDEKTSV4RRFFQ69G5FAV', '01ARZ3NDEKTSV4RRFFQ69G5FAV'], action: 'cancel' }],
    ['too many', { ids: Array.from({ length: 101 }, () => newId()), action: 'cancel' }], ['no id', { ids: ['1'], action: 'cancel' }],
    ['another command', { ids: ['01ARZ3NDEKTSV4RRFFQ69G5FAV'], action: 'purge' }], ['more than is asked', { ids: ['01ARZ3NDEKTSV4RRFFQ69G5FAV'], action: 'cancel', ownerId: 'x' }],
  ])('are refused when there are %s', async (_, body) => {
    expect((await mine.post('/api/jobs/bulk', body, { 'Idempotency-Key': randomUUID() })).status).toBe(422)
  })

  it('take a hundred', async () => {
    const results = await bulk(mine, Array.from({ length: 100 }, () => newId()), 'delete')
    expect(new Set(told(results))).toEqual(new Set(['not-found']))
  })
})

describe('running jobs again', () => {
  it('asks the same with another seed, priced and reserved for whoever does it', async () => {
    const job = await short(7)
    const [result] = await bulk(colleague, [job.id], 'rerun')
    const again = await readJob(colleague, result!.newId!)
    expect(again.owner.id).toBe(colleagueUser.id)
    expect(again.seed).not.toBe(7)
    expect(again.spec.numerics.seed).toBe(again.seed)
    expect({ ...again.spec, numerics: { ...again.spec.numerics, seed: 7 } }).toEqual(job.spec)
    const entries = await db.models.LedgerEntry.findAll({ where: { jobId: again.id, kind: 'reserve' } })
    expect(entries.map(entry => [entry.userId, entry.cpuMicros])).toEqual([[colleagueUser.id, Math.round(again.predictedCpuSeconds * 1e6)]])
    await finished(colleague, again.id)
  })

  it('makes one job however often the command is repeated, and another for another command', async () => {
    const jobs = [await short(1), await short(2)]
    const ids = jobs.map(job => job.id)
    const key = randomUUID()
    const replies = await Promise.all([bulk(mine, ids, 'rerun', key), bulk(mine, ids, 'rerun', key), bulk(mine, ids, 'rerun', key)])
    const made = replies.map(results => results.map(result => result.newId))
    expect(made[1]).toEqual(made[0])
    expect(made[2]).toEqual(made[0])
    expect(new Set([...made[0]!, ...ids]).size).toBe(4)
    const other = await bulk(mine, ids, 'rerun')
    expect(other.map(result => result.newId)).not.toEqual(made[0])
    expect((await mine.post('/api/jobs/bulk', { ids, action: 'rerun' })).status).toBe(400)
  })

  it('refuses what the quota does not allow, with the price, and does the rest', async () => {
    const [dear, cheap] = [await long(), await short(3)]
    await mine.post(`/api/jobs/${dear.id}/cancel`)
    const poor = await addUser(db, { teamId: owner.teamId, quota: cheap.predictedCpuSeconds * 2 })
    const results = await bulk(await signIn(addressOf(poor)), [dear.id, cheap.id], 'rerun')
    expect(told(results)).toEqual(['quota-exceeded', 'ok'])
    expect(problemSchema.parse(results[0]!.problem).predictedCpuSeconds).toBeCloseTo(dear.predictedCpuSeconds, 6)
  })
})
