import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { chunkJob, mergeChunks, openChunk } from '#shared/physics/engine'
import { meSchema, streamEventSchema } from '#shared/schemas/api'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { packPaths } from '../../server/models/results'
import type { Client } from './harness'
import { finished, motionSpec, openTestDatabase, signIn, submit, switchingSpec } from './harness'

const me = async (client: Client) => meSchema.parse(await (await client.get('/api/me')).json())

describe('From the queue to the answer', () => {
  let db: Database
  let client: Client

  beforeAll(async () => {
    db = openTestDatabase()
    client = await signIn('researcher')
  })
  afterAll(() => closeDatabase(db))

  it.each([
    ['how fast it switches', switchingSpec({ trials: 3000, seed: 71 })],
    ['how it moves', motionSpec({ paths: 6, seed: 72 })],
  ])('stores the same bytes as a run without portal, database or queue: %s', async (_, spec) => {
    const { id } = await submit(client, spec)
    const shown = await finished(client, id)
    const parts = chunkJob(spec, 1e-5).map(({ firstTrial, trialCount }) => {
      const run = openChunk(spec, firstTrial, trialCount)
      while (run.done < run.total) run.advance()
      return run.finish()
    })
    const alone = mergeChunks(spec, parts)
    const job = await db.models.Job.findByPk(id, { rejectOnEmpty: true })
    expect(shown.state).toBe('done')
    expect(shown.answer).toEqual(JSON.parse(JSON.stringify(alone.answer)))
    expect(job.answer).toBe(JSON.stringify(alone.answer))
    expect(job.paths?.equals(packPaths(alone.answer, alone.paths))).toBe(true)
    expect(job.headline).toBe(alone.answer.words.headline)
  })

  it('tells the team when a job runs, how far it is, at most about once a second, and when it is done', async () => {
    const { id } = await submit(client, switchingSpec({ trials: 40_000, seed: 73 }))
    const done = await finished(client, id)
    const rows = await db.models.EventRow.findAll({ where: { jobId: id, type: 'job' }, order: [['id', 'ASC']] })
    const events = rows.map(({ type, data }) => streamEventSchema.parse({ type, ...JSON.parse(data) }))
    const jobs = events.flatMap(event => event.type === 'job' ? [event.job] : [])
    const states = jobs.map(({ state }) => state)
    expect(states.filter((state, k) => state !== states[k - 1])).toEqual(['queued', 'running', 'done'])
    expect(jobs.at(-1)).toMatchObject({ progress: 1, headline: done.headline, cpuSeconds: done.cpuSeconds })
    const progress = jobs.map(job => job.progress)
    expect(progress).toEqual([...progress].sort((a, b) => a - b))
    const seconds = (Date.parse(done.finishedAt ?? '') - Date.parse(done.startedAt ?? '')) / 1000
    expect(jobs.length).toBeLessThanOrEqual(seconds + 5)
  })

  it('charges the CPU time that was measured', async () => {
    const before = await me(client)
    const { id } = await submit(client, switchingSpec({ trials: 1000, seed: 74 }))
    const done = await finished(client, id)
    const after = await me(client)
    expect(done.cpuSeconds).toBeGreaterThan(0)
    expect(after.quota.charged - before.quota.charged).toBeCloseTo(done.cpuSeconds, 5)
    expect(after.quota.reserved).toBe(before.quota.reserved)
  })
})
