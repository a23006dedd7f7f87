import { setTimeout as sleep } from 'node:timers/promises'
import { QueryTypes } from 'sequelize'
import { readSettings } from '#shared/schemas/settings'
import { sentence } from '#shared/utils/sentence'
import demo from '../../server/models/demo-team.json'
import type { Database } from '../../server/models/database'
import { closeDatabase, openDatabase } from '../../server/models/database'
import { newId } from '../../server/models/id'
import { submitJob } from '../../server/models/submit'
import { reducedSpec } from '../support/specs'
import { TestStack } from '../integration/testStack'

export const name = 'list: a page of 50 of 100 000 jobs, signed in, 100 requests a second beside two busy solvers'

const JOBS = 100_000
const AT_ONCE = 2000
const RATE = 100
const SECONDS = 20

/** What people look at, each as often as the others. */
const QUERIES = ['', 'sort=-cpu', 'sort=state', 'state=failed', 'question=motion', 'state=done&sort=cpu', 'q=Q-28', 'from=2026-06-01T00:00:00Z&to=2026-06-02T00:00:00Z']

export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const stack = await TestStack.start('measure-list', { webs: 1, workers: 1, env: { FARPOLE_WORKER_SLOTS: '2' } })
  const settings = readSettings(Object.fromEntries(Object.entries(stack.info.env).filter(([key]) => key.startsWith('FARPOLE_'))))
  const db = openDatabase({ ...settings.database, poolMax: 2 })
  try {
    await fill(db)
    const user = await db.models.User.findOne({ where: { email: demo.people[0]!.email }, rejectOnEmpty: true })
    const busy = reducedSpec({ stability: 40, drive: 1.5, width: 60, damping: 0.01, trials: 400_000 })
    await submitJob(db, { userId: user.id, teamId: user.teamId, spec: busy, idempotencyKey: 'measure-list' })
    const read = await reader(stack.info.baseUrl)
    for (const query of QUERIES) for (let k = 0; k < 3; k++) await read(query)
    const first = await load(read, [''])
    const all = await load(read, QUERIES)
    const nothing = await load(read, ['q=zzzzz'], 2, 5)
    const running = await db.models.Chunk.count({ where: { state: 'running' } })
    return [
      { metric: 'solvers busy at the end', value: running, unit: '' },
      ...rows('newest 50', first),
      ...rows(`${QUERIES.length} filters and orders in turn`, all),
      { metric: 'a word that no job has, p95', value: quantile(nothing.times, 0.95), unit: 'ms' },
    ]
  }
  finally {
    await closeDatabase(db)
    await stack.stop()
  }
}

interface Load { times: number[], failed: number }
const rows = (what: string, { times, failed }: Load) => [
  ...[0.5, 0.95, 0.99].map(share => ({ metric: `${what}, p${share * 100}`, value: quantile(times, share), unit: 'ms' })),
  { metric: `${what}, not answered with 200`, value: failed, unit: '' },
]
const quantile = (times: readonly number[], share: number): number => [...times].sort((a, b) => a - b)[Math.min(times.length - 1, Math.floor(share * times.length))] ?? NaN

/** Jobs of long use: in every state, of everybody, with specification and answer as long as real ones. */
async function fill(db: Database): Promise<void> {
  const people = await db.models.User.findAll({ where: { role: ['researcher', 'admin'] } })
  const spec = reducedSpec({ stability: 40, drive: 2, width: 5 })
  const states = ['done', 'done', 'done', 'failed', 'done', 'cancelled', 'done', 'done'] as const
  const answer = JSON.stringify({ padding: 'x'.repeat(4000) })
  for (let first = 0; first < JOBS; first += AT_ONCE) {
    await db.models.Job.bulkCreate(Array.from({ length: AT_ONCE }, (_, at) => {
      const k = first + at
      const owner = people[k % people.length]!
      const asked = new Date(Date.UTC(2026, 0, 1) + k * 250_000)
      const label = `cell Q-${k % 2000}`
      return {
        id: newId(), teamId: owner.teamId, ownerId: owner.id, state: states[k % states.length]!, question: k % 3 === 0 ? 'motion' as const : 'switching' as const,
        sentence: sentence({ ...spec, device: { ...spec.device, label } }), headline: `It switches in 2.${k % 1000} ns on average.`, spec: JSON.stringify(spec), specHash: '0'.repeat(64), seed: k, engineVersion: '1.0.0',
        predictedCpuMicros: 1e6 + k % 977 * 1e5, cpuMicros: 1e6 + k % 1013 * 1e5, trials: 1000, chunksTotal: 1, chunksDone: 1, answer,
        createdAt: asked, finishedAt: asked, settledAt: asked,
      }
    }))
  }
  await db.sequelize.query('ANALYZE TABLE jobs', { type: QueryTypes.SELECT })
}

async function reader(baseUrl: string): Promise<(query: string) => Promise<number>> {
  const { email } = demo.people[0]!
  const signedIn = await fetch(`${baseUrl}/api/session`, {
    method: 'POST', headers: { 'Content-Type': 'application/json', 'Origin': baseUrl }, body: JSON.stringify({ email, password: demo.password }),
  })
  const cookie = signedIn.headers.getSetCookie()[0]?.split(';')[0] ?? ''
  return async (query) => {
    const reply = await fetch(`${baseUrl}/api/jobs?limit=50${query && `&${query}`}`, { headers: { Cookie: cookie } })
    await reply.arrayBuffer()
    return reply.status
  }
}

/** Requests sent on the beat, whether or not earlier ones have been answered; times from when each was due. */
async function load(read: (query: string) => Promise<number>, queries: readonly string[], rate = RATE, seconds = SECONDS): Promise<Load> {
  const times: number[] = []
  let failed = 0
  const sent: Promise<void>[] = []
  const began = performance.now()
  for (let k = 0; k < rate * seconds; k++) {
    const due = began + 1000 * k / rate
    const early = due - performance.now()
    if (early > 0) await sleep(early)
    sent.push(read(queries[k % queries.length]!).then((status) => {
      times.push(performance.now() - due)
      if (status !== 200) failed++
    }, () => {
      failed++
    }))
  }
  await Promise.all(sent)
  return { times, failed }
}
