import { randomUUID } from 'node:crypto'
import { QueryTypes } from 'sequelize'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { jobDetailSchema, problemSchema } from '#shared/schemas/api'
import { jobListSchema } from '#shared/schemas/jobList'
import type { JobList } from '#shared/schemas/jobList'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { addUser, addressOf } from '../support/people'
import type { Client } from './harness'
import { finished, motionSpec, openTestDatabase, readJob, signIn, submit, switchingSpec, waitFor } from './harness'

let db: Database
let client: Client
let ownerId: string

beforeAll(async () => {
  db = openTestDatabase()
  const owner = await addUser(db, { quota: 72_000 })
  ownerId = owner.id
  client = await signIn(addressOf(owner))
})
afterAll(() => closeDatabase(db))

const key = (value: string = randomUUID()) => ({ 'Idempotency-Key': value })
const problemOf = async (reply: Response) => problemSchema.parse(await reply.json())
const pointers = async (reply: Response) => (await problemOf(reply)).errors?.map(error => error.pointer)

describe('queueing a job', () => {
  it('answers 201 with the job, its price and its place, and leaves one row with its chunks and its reservation', async () => {
    const spec = switchingSpec({ trials: 150, seed: 5 })
    const reply = await client.post('/api/jobs', spec, key())
    expect(reply.status).toBe(201)
    const job = jobDetailSchema.parse(await reply.json())
    expect(reply.headers.get('location')).toBe(`/api/jobs/${job.id}`)
    expect(job).toMatchObject({ spec, seed: 5, own: true, question: 'switching' })
    expect(job.predictedCpuSeconds).toBeGreaterThan(0)
    const chunks = await db.models.Chunk.findAll({ where: { jobId: job.id }, order: [['ordinal', 'ASC']] })
    expect(chunks).toHaveLength(job.chunks.total)
    expect(chunks.reduce((sum, chunk) => sum + chunk.trialCount, 0)).toBe(150)
    const reservations = await db.models.LedgerEntry.findAll({ where: { jobId: job.id, kind: 'reserve' } })
    expect(reservations.map(entry => entry.cpuMicros)).toEqual([Math.round(job.predictedCpuSeconds * 1e6)])
  })

  it('answers the same key and body with the same job, also in parallel', async () => {
    const spec = switchingSpec({ trials: 30, seed: 8 })
    const headers = key()
    const replies = await Promise.all(Array.from({ length: 8 }, () => client.post('/api/jobs', spec, headers)))
    expect(replies.map(reply => reply.status)).toEqual(Array.from({ length: 8 }, () => 201))
    const ids = await Promise.all(replies.map(async reply => jobDetailSchema.parse(await reply.json()).id))
    expect(new Set(ids).size).toBe(1)
    expect(replies.filter(reply => reply.headers.get('idempotency-replayed') === 'true')).toHaveLength(7)
    expect(await db.models.LedgerEntry.count({ where: { jobId: ids[0]!, kind: 'reserve' } })).toBe(1)
  })

  it('refuses the same key with another body, and a missing or odd key', async () => {
    const headers = key()
    expect((await client.post('/api/jobs', switchingSpec({ seed: 1 }), headers)).status).toBe(201)
    const other = await client.post('/api/jobs', switchingSpec({ seed: 2 }), headers)
    expect(other.status).toBe(422)
    expect((await problemOf(other)).type).toBe('idempotency-key-reused')
    expect((await client.post('/api/jobs', switchingSpec())).status).toBe(400)
    expect((await client.post('/api/jobs', switchingSpec(), key('short'))).status).toBe(400)
  })

  it('keeps keys of different users apart', async () => {
    const headers = key()
    const other = await signIn(addressOf(await addUser(db)))
    const mine = await submit(client, switchingSpec({ trials: 20 }), headers['Idempotency-Key'])
    const theirs = await submit(other, switchingSpec({ trials: 20 }), headers['Idempotency-Key'])
    expect(theirs.id).not.toBe(mine.id)
  })

  it('points at unknown keys and faulty values', async () => {
    const spec = switchingSpec()
    const reply = await client.post('/api/jobs', { ...spec, ownerId, device: { ...spec.device, damping: -1, role: 'admin' } }, key())
    expect(reply.status).toBe(422)
    expect((await pointers(reply))?.sort()).toEqual(['/device/damping', '/device/role', '/ownerId'])
  })

  it.each(['1e999', '-1', '1e400', '"0.1"', 'null', '[]', 'true'])('refuses %s for a number', async (text) => {
    const body = JSON.stringify(switchingSpec()).replace(/"damping":[^,]+/, `"damping":${text}`)
    const reply = await client.post('/api/jobs', body, key())
    expect(reply.status).toBe(422)
    expect(await pointers(reply)).toEqual(['/device/damping'])
  })

  it.each(['NaN', 'Infinity', '.5', '0x10'])('refuses %s, which is no JSON', async (text) => {
    const body = JSON.stringify(switchingSpec()).replace(/"damping":[^,]+/, `"damping":${text}`)
    expect((await client.post('/api/jobs', body, key())).status).toBe(400)
  })

  it('refuses seeds that a double cannot hold exactly', async () => {
    for (const seed of ['9007199254740993', '4294967296', '-1', '1.5']) {
      const body = JSON.stringify(switchingSpec()).replace(/"seed":\d+/, `"seed":${seed}`)
      expect((await client.post('/api/jobs', body, key())).status, seed).toBe(422)
    }
  })

  it('refuses at its field a device whose moment does not stand on end', async () => {
    const spec = switchingSpec()
    const reply = await client.post('/api/jobs', { ...spec, device: { ...spec.device, anisotropy: { kind: 'interface', interfaceAnisotropy: 1e-5 } } }, key())
    expect(reply.status).toBe(422)
    expect((await pointers(reply))?.[0]).toMatch(/^\/device\/anisotropy/)
  })

  it('refuses a job over the cap with its price, at once and without a trace', async () => {
    const spec = switchingSpec({ trials: 1_000_000 })
    const before = await db.models.Job.count({ where: { ownerId } })
    const started = performance.now()
    const reply = await client.post('/api/jobs', {
      ...spec, write: { ...spec.write, width: 1e-6 }, numerics: { seed: 1, step: { kind: 'fixed', step: 1e-12 } },
    }, key())
    expect(performance.now() - started).toBeLessThan(1000)
    expect(reply.status).toBe(422)
    const problem = await problemOf(reply)
    expect(problem.type).toBe('price-cap')
    expect(problem.predictedCpuSeconds).toBeGreaterThan(36_000)
    expect(problem.capCpuSeconds).toBe(36_000)
    expect(await db.models.Job.count({ where: { ownerId } })).toBe(before)
  })
})

describe('the list of jobs', () => {
  it('comes in pages that hold every job once, newest first', async () => {
    const other = await signIn(addressOf(await addUser(db)))
    const made: string[] = []
    for (let k = 0; k < 7; k++) made.push((await submit(other, switchingSpec({ trials: 10, seed: k }))).id)
    const seen: string[] = []
    let path: string | null = '/api/jobs?limit=3'
    while (path !== null) {
      const reply: Response = await other.get(path)
      const page: JobList = jobListSchema.parse(await reply.json())
      seen.push(...page.jobs.map(job => job.id))
      path = page.next && `/api/jobs?limit=3&cursor=${page.next}`
      expect(reply.headers.get('link')).toBe(path && `<${path}>; rel="next"`)
    }
    expect(seen).toEqual(made.reverse())
  })

  it.each(['limit=0', 'limit=101', 'limit=-1', 'limit=', 'limit=1e1', 'cursor=%27%20OR%201', 'sort=name', 'teamId=x', 'limit=1&limit=2'])('refuses ?%s', async (query) => {
    expect((await client.get(`/api/jobs?${query}`)).status).toBe(422)
  })
})

describe('ending a job', () => {
  it('cancels one that waits or runs, gives the reservation back, and keeps saying so', async () => {
    const { id, predictedCpuSeconds } = await submit(client, switchingSpec({ trials: 500_000 }))
    const quota = async () => (await (await client.get('/api/me')).json()).quota.reserved as number
    expect(await quota()).toBeGreaterThanOrEqual(predictedCpuSeconds)
    expect((await client.delete(`/api/jobs/${id}`)).status).toBe(409)
    const reply = await client.post(`/api/jobs/${id}/cancel`, {})
    expect(reply.status).toBe(200)
    expect(jobDetailSchema.parse(await reply.json()).state).toBe('cancelled')
    expect((await client.post(`/api/jobs/${id}/cancel`)).status).toBe(200)
    await expect.poll(quota, { timeout: 20_000 }).toBeLessThan(predictedCpuSeconds)
    const entries = await db.models.LedgerEntry.findAll({ where: { jobId: id } })
    expect(entries.map(entry => entry.kind).sort()).toEqual(['charge', 'release', 'reserve'])
    expect(entries.filter(entry => entry.kind !== 'charge').reduce((sum, entry) => sum + entry.cpuMicros, 0)).toBe(0)
  })

  it('deletes one that has ended, for everyone and for good', async () => {
    const { id } = await submit(client, switchingSpec({ trials: 20 }))
    expect((await finished(client, id)).state).toBe('done')
    expect((await client.post(`/api/jobs/${id}/cancel`)).status).toBe(409)
    expect((await client.delete(`/api/jobs/${id}`)).status).toBe(204)
    expect((await client.get(`/api/jobs/${id}`)).status).toBe(404)
    expect((await client.delete(`/api/jobs/${id}`)).status).toBe(404)
    expect(await (await client.get('/api/jobs?limit=100')).text()).not.toContain(id)
  })
})

describe('a running job', () => {
  it('shows what its finished parts say so far, and their paths', async () => {
    const { id, chunks } = await submit(client, switchingSpec({ trials: 900_000 }))
    expect(chunks.total).toBeGreaterThan(3)
    const job = await waitFor('a part of the job', async () => {
      const seen = await readJob(client, id)
      return seen.chunks.done > 0 && seen.answer ? seen : null
    }, 45_000)
    if (job.answer?.kind !== 'switching' || job.state !== 'running') throw new Error(`too late to look: ${job.state}`)
    expect(job.answer.complete).toBe(false)
    expect(job.answer.trials).toBeLessThan(900_000)
    expect(job.progress).toBeGreaterThan(0)
    expect(job.progress).toBeLessThan(1)
    expect((await client.get(`/api/jobs/${id}/paths`)).status).toBe(200)

    const cancelled = jobDetailSchema.parse(await (await client.post(`/api/jobs/${id}/cancel`)).json())
    expect(cancelled).toMatchObject({ state: 'cancelled', waiting: null, eta: null, answer: { kind: 'switching', complete: false } })
    const settled = await waitFor('what it used to be charged', async () => (await db.models.Job.findByPk(id, { rejectOnEmpty: true })).settledAt && readJob(client, id), 20_000)
    const [charge] = await db.models.LedgerEntry.findAll({ where: { jobId: id, kind: 'charge' } })
    expect(charge?.cpuMicros).toBeGreaterThan(0)
    expect(charge?.cpuMicros).toBe(Math.round(settled.cpuSeconds * 1e6))
    if (settled.answer?.kind !== 'switching') throw new Error('its partial answer is gone')
    const { failures, trials } = settled.answer
    for (const { of, low, value, high } of Object.values(failures)) expect([of === trials, low <= value, value <= high]).toEqual([true, true, true])
    expect((await client.get(`/api/jobs/${id}/paths`)).status).toBe(200)
  })

  it('says when it will be over, and why another one waits', async () => {
    const { id } = await submit(client, switchingSpec({ trials: 900_000, seed: 2 }))
    const later = await submit(client, switchingSpec({ trials: 1000, seed: 3 }))
    const waiting = await waitFor('it to wait behind the first', async () => {
      const seen = await readJob(client, later.id)
      return seen.waiting?.reason === 'own' && seen.eta ? seen : null
    })
    expect(waiting.waiting).toMatchObject({ words: 'An earlier job of the same person comes first.' })
    expect(waiting.waiting!.jobsBefore).toBeGreaterThanOrEqual(1)
    expect(waiting.waiting!.cpuSecondsBefore).toBeGreaterThan(1)
    const running = await waitFor('the first to run', async () => {
      const seen = await readJob(client, id)
      return seen.state === 'running' && seen.eta ? seen : null
    })
    expect(Date.parse(running.eta!.low)).toBeLessThan(Date.parse(running.eta!.high))
    expect(Date.parse(waiting.eta!.high)).toBeGreaterThan(Date.now())
    const kept = await waitFor('what was foretold to be kept', async () => {
      const [row] = await db.sequelize.query<{ low: number, high: number }>('SELECT lowSeconds AS low, highSeconds AS high FROM etaPredictions WHERE jobId = :id', { replacements: { id }, type: QueryTypes.SELECT })
      return row
    })
    expect(kept.low).toBeLessThan(kept.high)
    for (const job of [later.id, id]) await client.post(`/api/jobs/${job}/cancel`)
  })
})

describe('a finished job', () => {
  it('has its answer, complete and charged for what it took', async () => {
    const { id } = await submit(client, motionSpec({ paths: 3 }))
    const job = await finished(client, id)
    expect(job).toMatchObject({ state: 'done', progress: 1, answer: { kind: 'motion', complete: true } })
    expect(job.headline).toBe(job.answer?.words.headline)
    const [charge] = await db.models.LedgerEntry.findAll({ where: { jobId: id, kind: 'charge' } })
    expect(charge?.cpuMicros).toBe(Math.round(job.cpuSeconds * 1e6))
    expect((await readJob(client, id)).waiting).toBeNull()
  })
})
