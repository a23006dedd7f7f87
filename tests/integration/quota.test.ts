import { randomUUID } from 'node:crypto'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { personListSchema, personSchema } from '#shared/schemas/accounts'
import { meSchema, problemSchema } from '#shared/schemas/api'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import type { User } from '../../server/models/people'
import { addUser, addressOf } from '../support/people'
import type { Client } from './harness'
import { openTestDatabase, signIn, submit, switchingSpec } from './harness'

let db: Database
beforeAll(() => {
  db = openTestDatabase()
})
afterAll(() => closeDatabase(db))

const quotaOf = async (client: Client) => meSchema.parse(await (await client.get('/api/me')).json()).quota
const setQuota = (user: User, cpuMicros: number) => user.update({ quotaCpuMicros: cpuMicros })

describe('the quota', () => {
  it('lets exactly one of fifty parallel submissions in when there is room for one', async () => {
    const user = await addUser(db)
    const client = await signIn(addressOf(user))
    // Long enough that none has ended, and given anything back, while the others are being judged.
    const spec = switchingSpec({ trials: 400_000 })
    const probe = await submit(client, spec)
    const price = Math.round(probe.predictedCpuSeconds * 1e6)
    await client.post(`/api/jobs/${probe.id}/cancel`)
    await expect.poll(async () => (await quotaOf(client)).reserved, { timeout: 20_000 }).toBe(0)
    await setQuota(user, Math.round((await quotaOf(client)).charged * 1e6) + 2 * price - 1)
    const replies = await Promise.all(Array.from({ length: 50 }, () => client.post('/api/jobs', spec, { 'Idempotency-Key': randomUUID() })))
    const statuses = replies.map(reply => reply.status).sort()
    expect(statuses).toEqual([201, ...Array.from({ length: 49 }, () => 409)])
    const refused = problemSchema.parse(await replies.find(reply => reply.status === 409)!.json())
    expect(refused.type).toBe('quota-exceeded')
    expect(refused.predictedCpuSeconds).toBe(price / 1e6)
    expect(refused.leftCpuSeconds).toBe((price - 1) / 1e6)
    const jobs = await db.models.Job.findAll({ where: { ownerId: user.id }, attributes: ['id'] })
    expect(jobs).toHaveLength(2)
    const held = await db.models.LedgerEntry.findAll({ where: { userId: user.id } })
    expect(held.filter(entry => entry.kind === 'reserve')).toHaveLength(2)
    expect(await db.models.IdempotencyKey.count({ where: { userId: user.id } })).toBe(2)
    const won = jobs.find(job => job.id !== probe.id)!
    await client.post(`/api/jobs/${won.id}/cancel`)
  })

  it('counts charges of the last thirty days alone', async () => {
    const user = await addUser(db, { quota: 100 })
    const client = await signIn(addressOf(user))
    const { id } = await submit(client, switchingSpec({ trials: 20 }))
    await expect.poll(async () => (await quotaOf(client)).charged, { timeout: 30_000 }).toBeGreaterThan(0)
    await db.models.LedgerEntry.update({ effectiveAt: new Date(Date.now() - 31 * 86_400_000) }, { where: { jobId: id } })
    expect(await quotaOf(client)).toMatchObject({ charged: 0, reserved: 0, left: 100, limit: 100, windowDays: 30 })
  })

  it('is never left below zero', async () => {
    const user = await addUser(db, { quota: 1000 })
    const client = await signIn(addressOf(user))
    const { id } = await submit(client, switchingSpec({ trials: 400_000 }))
    await setQuota(user, 1)
    expect((await quotaOf(client)).left).toBe(0)
    await client.post(`/api/jobs/${id}/cancel`)
  })
})

describe('an admin', () => {
  it('sees the people of the team and sets what each may use', async () => {
    const admin = await signIn('admin')
    const { people } = personListSchema.parse(await (await admin.get('/api/people')).json())
    const colleague = people.find(person => person.email === 'colleague@example.org')!
    const reply = await admin.patch(`/api/people/${colleague.id}`, { quotaCpuSeconds: 1234.5, reason: 'a smaller share' })
    expect(reply.status).toBe(200)
    expect(personSchema.parse(await reply.json()).quota.limit).toBe(1234.5)
    expect((await quotaOf(await signIn('colleague@example.org'))).limit).toBe(1234.5)
    await admin.patch(`/api/people/${colleague.id}`, { quotaCpuSeconds: colleague.quota.limit, reason: 'as before' })
  })

  it('sets no nonsense, nothing without a reason and nothing in another team', async () => {
    const admin = await signIn('admin')
    const { people: [person] } = personListSchema.parse(await (await admin.get('/api/people')).json())
    const at = `/api/people/${person!.id}`
    const reason = 'because'
    for (const body of [{}, { reason }, { quotaCpuSeconds: 5 }, { quotaCpuSeconds: 5, reason: ' ' }, { quotaCpuSeconds: -1, reason }, { quotaCpuSeconds: '5', reason }, { quotaCpuSeconds: 1e9, reason }, { quotaCpuSeconds: 5, reason, teamId: person!.id }]) {
      expect((await admin.patch(at, body)).status).toBe(422)
    }
    const stranger = await addUser(db)
    expect((await admin.patch(`/api/people/${stranger.id}`, { quotaCpuSeconds: 5, reason })).status).toBe(404)
    expect((await stranger.reload()).quotaCpuMicros).toBe(3600e6)
    expect(JSON.stringify(await (await admin.get('/api/people')).json())).not.toContain(stranger.id)
  })
})
