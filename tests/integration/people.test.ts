import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { personListSchema, personSchema, queueSchema, quotaHistorySchema } from '#shared/schemas/accounts'
import { problemSchema } from '#shared/schemas/api'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import type { User } from '../../server/models/people'
import { addUser, addressOf } from '../support/people'
import type { Client } from './harness'
import { account, openTestDatabase, signIn, submit, switchingSpec, waitFor } from './harness'

let db: Database
beforeAll(() => {
  db = openTestDatabase()
})
afterAll(() => closeDatabase(db))

const status = async (reply: Promise<Response>) => (await reply).status
const detail = async (reply: Response) => problemSchema.parse(await reply.json()).detail
const peopleOf = async (client: Client) => personListSchema.parse(await (await client.get('/api/people')).json()).people

/** A team of its own: an admin, signed in, and as many more people as roles are named. */
async function team(...roles: ('admin' | 'researcher' | 'student')[]) {
  const boss = await addUser(db, { role: 'admin' })
  const others: User[] = []
  for (const role of roles) others.push(await addUser(db, { role, teamId: boss.teamId }))
  return { boss, others, client: await signIn(addressOf(boss)) }
}

describe('the people of a team', () => {
  it('are listed for its admins with role, state, use and what they have in the queue', async () => {
    const { boss, others: [worker], client } = await team('researcher')
    const queueing = await signIn(addressOf(worker!))
    const { id } = await submit(queueing, switchingSpec({ trials: 400_000 }))
    const people = await peopleOf(client)
    expect(people.map(person => person.id).sort()).toEqual([boss.id, worker!.id].sort())
    const row = people.find(person => person.id === worker!.id)!
    expect(row).toMatchObject({ role: 'researcher', state: 'active', usedCpuSeconds: 0 })
    expect(row.waitingJobs + row.runningChunks).toBeGreaterThan(0)
    expect(Date.now() - Date.parse(row.lastSeenAt!)).toBeLessThan(60_000)
    const queue = queueSchema.parse(await (await queueing.get('/api/queue')).json())
    expect(queue.users.map(user => user.person)).toEqual([{ id: worker!.id, name: 'Ansel Moor' }])
    expect(queue.users[0]!.waitingCpuSeconds).toBeGreaterThan(0)
    expect(queue.slots).toBe(queue.workers.reduce((sum, { slots }) => sum + slots, 0))
    const elsewhere = queueSchema.parse(await (await (await signIn('student')).get('/api/queue')).json())
    expect(JSON.stringify(elsewhere)).not.toContain(worker!.id)
    expect(elsewhere.elsewhere.waitingCpuSeconds).toBeGreaterThan(0)
    await queueing.post(`/api/jobs/${id}/cancel`)
  })

  it('get quotas with a reason, and every change is kept with who made it', async () => {
    const { boss, others: [worker], client } = await team('researcher')
    const at = `/api/people/${worker!.id}`
    expect(personSchema.parse(await (await client.patch(at, { quotaCpuSeconds: 7200, reason: ' two <b>cells</b> more ' })).json()).quota.limit).toBe(7200)
    await client.patch(at, { quotaCpuSeconds: 7200, reason: 'the same again' })
    await client.patch(at, { quotaCpuSeconds: 60.5, reason: 'holidays' })
    const { entries } = quotaHistorySchema.parse(await (await client.get(`${at}/quota-history`)).json())
    expect(entries.map(({ by, fromCpuSeconds, toCpuSeconds, reason }) => ({ by: by.id, fromCpuSeconds, toCpuSeconds, reason }))).toEqual([
      { by: boss.id, fromCpuSeconds: 7200, toCpuSeconds: 60.5, reason: 'holidays' },
      { by: boss.id, fromCpuSeconds: 3600, toCpuSeconds: 7200, reason: 'two <b>cells</b> more' },
    ])
    expect(await status((await signIn('admin')).get(`${at}/quota-history`))).toBe(404)
  })

  it('lose rights at their next request, and their open streams end', async () => {
    const { others: [second], client } = await team('admin')
    const theirs = await signIn(addressOf(second!))
    const stream = async () => {
      const reader = (await theirs.get('/api/events')).body!.getReader()
      await reader.read()
      const state = { over: false }
      void (async () => {
        while (!(await reader.read()).done) continue
        state.over = true
      })()
      return state
    }
    const first = await stream()
    expect((await client.patch(`/api/people/${second!.id}`, { role: 'student' })).status).toBe(200)
    expect(await status(theirs.get('/api/people'))).toBe(403)
    expect(await status(theirs.post('/api/jobs', switchingSpec({ trials: 20 }), { 'Idempotency-Key': 'as-a-student' }))).toBe(403)
    await waitFor('the stream of the demoted to end', () => first.over, 8000)
    const again = await stream()
    expect(personSchema.parse(await (await client.patch(`/api/people/${second!.id}`, { active: false })).json()).state).toBe('disabled')
    expect(await status(theirs.get('/api/me'))).toBe(401)
    await waitFor('the stream of the disabled to end', () => again.over, 8000)
    // Whoever is enabled again has to sign in again.
    expect((await client.patch(`/api/people/${second!.id}`, { active: true, role: 'researcher' })).status).toBe(200)
    expect(await status(theirs.get('/api/me'))).toBe(401)
    expect(await status((await signIn(addressOf(second!))).get('/api/me'))).toBe(200)
  })

  it('of another team are not there, and unknown values are refused', async () => {
    const { client } = await team()
    const stranger = await addUser(db)
    for (const body of [{ role: 'student' }, { active: false }, { quotaCpuSeconds: 1, reason: 'none' }]) {
      expect(await status(client.patch(`/api/people/${stranger.id}`, body))).toBe(404)
    }
    expect(await stranger.reload()).toMatchObject({ role: 'researcher', active: true, quotaCpuMicros: 3600e6 })
    for (const body of [{ role: 'owner' }, { active: 'false' }, { name: 'x' }, { teamId: stranger.teamId }]) {
      expect(await status(client.patch(`/api/people/${stranger.id}`, body))).toBe(422)
    }
  })
})

describe('the last active admin of a team', () => {
  it('stays one', async () => {
    const { boss, others: [disabled, student], client } = await team('admin', 'student')
    await disabled!.update({ active: false })
    const at = `/api/people/${boss.id}`
    for (const body of [{ role: 'researcher' }, { active: false }, { role: 'student', active: true }, { quotaCpuSeconds: 1, reason: 'x', role: 'student' }]) {
      const refused = await client.patch(at, body)
      expect([refused.status, await detail(refused)]).toEqual([409, 'This is the last active admin of the team. Make somebody else an admin first.'])
    }
    expect(await boss.reload()).toMatchObject({ role: 'admin', active: true, quotaCpuMicros: 3600e6 })
    expect(await status(client.patch(at, { role: 'admin', active: true }))).toBe(200)
    expect(await status(client.patch(`/api/people/${student!.id}`, { role: 'admin' }))).toBe(200)
    expect(await status(client.patch(at, { role: 'researcher' }))).toBe(200)
    expect(await status(client.get('/api/people'))).toBe(403)
  })

  it('is left when two admins demote each other, or themselves, at once', async () => {
    for (const crosswise of [true, false]) {
      for (let round = 0; round < 5; round++) {
        const { boss, others: [second], client } = await team('admin')
        const theirs = await signIn(addressOf(second!))
        const [mine, yours] = crosswise ? [second!.id, boss.id] : [boss.id, second!.id]
        const replies = await Promise.all([client.patch(`/api/people/${mine}`, { role: 'student' }), theirs.patch(`/api/people/${yours}`, { active: false })])
        expect(replies.filter(reply => reply.status === 200)).toHaveLength(1)
        expect([403, 409, 401]).toContain(replies.find(reply => reply.status !== 200)!.status)
        expect(await db.models.User.count({ where: { teamId: boss.teamId, role: 'admin', active: true } })).toBe(1)
      }
    }
  })
})

it('nobody but an admin sees the people or changes them', async () => {
  const { id } = (await db.models.User.findOne({ where: { email: account('student').email }, rejectOnEmpty: true }))
  for (const role of ['researcher', 'student'] as const) {
    const client = await signIn(role)
    expect(await status(client.get('/api/people'))).toBe(403)
    expect(await status(client.patch(`/api/people/${id}`, { role: 'admin' }))).toBe(403)
    expect(await status(client.get(`/api/people/${id}/quota-history`))).toBe(403)
  }
})
