import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { JobState } from '#shared/schemas/api'
import { JOB_SORTS, askersSchema, jobListSchema } from '#shared/schemas/jobList'
import type { JobList, JobSort } from '#shared/schemas/jobList'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { newId } from '../../server/models/id'
import type { Job } from '../../server/models/jobs'
import type { User } from '../../server/models/people'
import { addUser, addressOf } from '../support/people'
import type { Client } from './harness'
import { openTestDatabase, signIn, switchingSpec } from './harness'

let db: Database
let client: Client
let student: Client
let stranger: Client
let owners: User[]
let theirs: Job[]

const STATES: JobState[] = ['done', 'failed', 'cancelled', 'done']
const SPEC = JSON.stringify(switchingSpec())

/** Jobs of one team as they lie in the table after long use: several at one time, prices alike. */
async function fill(users: User[], count: number, words = (k: number) => `How fast does cell Q-${k % 30} switch?`): Promise<Job[]> {
  return db.models.Job.bulkCreate(Array.from({ length: count }, (_, k) => {
    const state = STATES[k % STATES.length]!
    const owner = users[k % users.length]!
    return {
      id: newId(), teamId: owner.teamId, ownerId: owner.id, state, question: k % 3 === 0 ? 'motion' as const : 'switching' as const,
      sentence: words(k), headline: state === 'done' ? `It switches in 2.${k % 10} ns, over 30\u202F00${k % 10} trials.` : null, spec: SPEC, specHash: '0'.repeat(64), seed: 1, engineVersion: '1.0.0',
      predictedCpuMicros: 1e6 * (k % 5 + 1), cpuMicros: k % 7 === 0 ? 0 : 1e5 * (k % 4), trials: 10, chunksTotal: 1, chunksDone: 0,
      createdAt: new Date(Date.UTC(2026, 8, 1) + 3_600_000 * Math.floor(k / 3)), settledAt: new Date(), finishedAt: new Date(),
    }
  }))
}

beforeAll(async () => {
  db = openTestDatabase()
  const first = await addUser(db)
  owners = [first, await addUser(db, { teamId: first.teamId }), await addUser(db, { teamId: first.teamId })]
  client = await signIn(addressOf(first))
  student = await signIn(addressOf(await addUser(db, { role: 'student', teamId: first.teamId })))
  const other = await addUser(db)
  stranger = await signIn(addressOf(other))
  await fill(owners, 100)
  theirs = await fill([other], 20, k => `How does the cell X%_${k} move?`)
})
afterAll(() => closeDatabase(db))

const read = async (path: string, as = client): Promise<JobList> => {
  const reply = await as.get(path)
  if (reply.status !== 200) throw new Error(`${path} answered ${reply.status}: ${await reply.text()}`)
  return jobListSchema.parse(await reply.json())
}

/** All pages of a query, following the cursors; `between` happens after each page. */
async function walk(query: string, limit: number, between: (page: number) => Promise<unknown> = async () => undefined): Promise<JobList['jobs']> {
  const all: JobList['jobs'] = []
  for (let cursor: string | null = '', page = 0; cursor !== null; page++) {
    const { jobs, next }: JobList = await read(`/api/jobs?limit=${limit}&${query}${cursor && `&cursor=${cursor}`}`)
    all.push(...jobs)
    cursor = next
    await between(page)
    if (page > 200) throw new Error('The pages never end.')
  }
  return all
}

const shown = (job: JobList['jobs'][number]) => job.cpuSeconds === 0 ? job.predictedCpuSeconds : job.cpuSeconds
const rank = (job: JobList['jobs'][number]) => ['queued', 'running', 'done', 'failed', 'cancelled'].indexOf(job.state)
const KEYS: Record<JobSort, (job: JobList['jobs'][number]) => number[]> = {
  '-created': job => [-Date.parse(job.createdAt)], 'created': job => [Date.parse(job.createdAt)],
  '-cpu': job => [-shown(job)], 'cpu': job => [shown(job)],
  'state': job => [rank(job), -Date.parse(job.createdAt)], '-state': job => [-rank(job), Date.parse(job.createdAt)],
}

describe('the order of the list', () => {
  it.each(JOB_SORTS)('%s: pages of seven hold every job once, in order, whatever comes and changes meanwhile', async (sort) => {
    const before = new Set((await walk(`sort=${sort}`, 100)).map(job => job.id))
    const seen = await walk(`sort=${sort}`, 7, async (page) => {
      if (page % 4 !== 0) return
      const [added] = await fill(owners, 1, () => 'How fast is a job that came in between?')
      await added!.update({ createdAt: new Date(), headline: 'and has changed' })
    })
    const ids = seen.map(job => job.id)
    expect(new Set(ids).size).toBe(ids.length)
    expect(ids.filter(id => before.has(id)).length).toBe(before.size)
    const keys = seen.map(KEYS[sort])
    for (const [k, key] of keys.slice(1).entries()) {
      const at = key.findIndex((value, place) => value !== keys[k]![place])
      if (at >= 0) expect(key[at]!, `${k}`).toBeGreaterThan(keys[k]![at]!)
    }
  })

  it('refuses a cursor of another order, a changed and a foreign one', async () => {
    const { next } = await read('/api/jobs?limit=3&sort=cpu')
    expect((await client.get(`/api/jobs?limit=3&sort=cpu&cursor=${next}`)).status).toBe(200)
    for (const query of [`sort=-cpu&cursor=${next}`, `cursor=${next}`, `sort=cpu&cursor=${next}A`, `sort=cpu&cursor=${next?.slice(2)}`, 'sort=cpu&cursor=', 'cursor=%00']) {
      const reply = await client.get(`/api/jobs?limit=3&${query}`)
      expect(reply.status, query).toBe(422)
      expect(((await reply.json()) as { errors: { pointer: string }[] }).errors[0]?.pointer).toBe('/cursor')
    }
  })

  it('links to the next page of the same question', async () => {
    const reply = await client.get('/api/jobs?sort=cpu&state=done&limit=2')
    const { next } = jobListSchema.parse(await reply.json())
    const link = /^<([^>]+)>; rel="next"$/.exec(reply.headers.get('link') ?? '')?.[1] ?? ''
    const params = new URL(link, 'http://127.0.0.1').searchParams
    expect(Object.fromEntries(params)).toEqual({ sort: 'cpu', state: 'done', limit: '2', cursor: next })
    expect((await client.get(link)).status).toBe(200)
  })
})

describe('filters', () => {
  const cases: [string, (job: JobList['jobs'][number]) => boolean][] = [
    ['state=failed', job => job.state === 'failed'],
    ['state=open', job => job.state === 'queued' || job.state === 'running'],
    ['question=motion', job => job.question === 'motion'],
    ['q=q-28', job => job.sentence.includes('Q-28')],
    ['q=CELL%20q-2', job => job.sentence.includes('Q-2')],
    ['q=30004', job => job.headline?.includes('30\u202F004') ?? false],
    ['q=2.', job => job.headline?.includes('2.') ?? false],
    ['q=%25', () => false],
    ['q=q_2', () => false],
    ['q=%27%29%20OR%201%3D1%20--', () => false],
    ['q=%5C', () => false],
    ['from=2026-09-01T05:00:00Z&to=2026-09-01T09:00:00Z', job => job.createdAt >= '2026-09-01T05' && job.createdAt < '2026-09-01T09'],
    ['from=2026-09-01T07:00:00%2B02:00&to=2026-09-01T06:00:00Z', job => job.createdAt >= '2026-09-01T05' && job.createdAt < '2026-09-01T06'],
    ['state=done&question=switching&q=switch&sort=-cpu', job => job.state === 'done' && job.question === 'switching'],
  ]

  it.each(cases)('%s gives just those', async (query, fits) => {
    const all = await walk('', 100)
    const expected = all.filter(fits).map(job => job.id).sort()
    expect((await walk(query, 9)).map(job => job.id).sort()).toEqual(expected)
  })

  it('one person’s jobs are just those', async () => {
    const found = await walk(`owner=${owners[1]!.id}&sort=state`, 10)
    expect(found.length).toBeGreaterThan(30)
    expect(new Set(found.map(job => job.owner.id))).toEqual(new Set([owners[1]!.id]))
  })

  it('none of them shows another team’s or a deleted job', async () => {
    const foreign = new Set(theirs.map(job => job.id))
    const [gone] = await fill(owners, 1, () => 'How fast is a deleted one?')
    await gone!.update({ deletedAt: new Date() })
    for (const query of ['', `owner=${theirs[0]!.ownerId}`, 'q=cell', 'q=deleted', 'state=done', 'question=motion', 'from=2026-01-01T00:00:00Z', 'sort=cpu', 'sort=-state']) {
      for (const job of await walk(query, 100)) expect(foreign.has(job.id) || job.id === gone!.id, query).toBe(false)
    }
    expect(await walk(`owner=${theirs[0]!.ownerId}`, 100)).toEqual([])
    expect(new Set((await read('/api/jobs?limit=100', stranger)).jobs.map(job => job.id))).toEqual(foreign)
  })

  it.each([
    'state=Done', 'state=done&state=failed', 'state=done,failed', 'state=', 'owner=me', 'owner=%25', 'question=all', 'from=yesterday', 'from=2026-09-01', 'to=2026-13-01T00:00:00Z',
    'q=', 'q=%20', `q=${'x'.repeat(101)}`, `q=${'a%20'.repeat(9)}`, 'sort=owner', 'sort=created%20desc', 'sort=', 'deleted=1', 'team=x', 'limit=50.0', 'q=a&q=b',
  ])('refuses ?%s', async (query) => {
    expect((await client.get(`/api/jobs?${query}`)).status).toBe(422)
  })

  it('offers the people who have asked something, to students too', async () => {
    const { people } = askersSchema.parse(await (await student.get('/api/jobs/people')).json())
    expect(people.map(person => person.id).sort()).toEqual(owners.map(owner => owner.id).sort())
  })
})
