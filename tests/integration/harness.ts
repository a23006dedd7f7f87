import { randomUUID } from 'node:crypto'
import { setTimeout as sleep } from 'node:timers/promises'
import { Redis } from 'ioredis'
import { inject } from 'vitest'
import type { JobDetail, Role } from '#shared/schemas/api'
import { jobDetailSchema } from '#shared/schemas/api'
import type { JobSpec, JobSpecInput } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { readSettings } from '#shared/schemas/settings'
import demo from '../../server/models/demo-team.json'
import type { Database } from '../../server/models/database'
import { openDatabase } from '../../server/models/database'
import type { StackInfo } from './testStack'

/** The installation that the project's set-up started. */
export const theStack = (): StackInfo => inject('stack')

/** The application's own view of the database. Close it with `closeDatabase` when the file's tests are done. */
export const openTestDatabase = (stack: StackInfo = theStack()): Database => openDatabase({ ...readSettings(settingsOf(stack)).database, poolMax: 4 })

/** A Redis connection of the test's own. Disconnect it when done. */
export const openTestRedis = (stack: StackInfo = theStack()): Redis => new Redis({ ...readSettings(settingsOf(stack)).redis, maxRetriesPerRequest: 1 })

const settingsOf = (stack: StackInfo) => Object.fromEntries(Object.entries(stack.env).filter(([name]) => name.startsWith('FARPOLE_')))

/** A browser's worth of HTTP: a session cookie, the right Origin, JSON in and out. Every call answers the Response. */
export class Client {
  constructor(readonly baseUrl: string, public cookie = '') {}

  get(path: string, headers: Record<string, string> = {}): Promise<Response> {
    return this.send('GET', path, undefined, headers)
  }

  post(path: string, body?: unknown, headers: Record<string, string> = {}): Promise<Response> {
    return this.send('POST', path, body, headers)
  }

  patch(path: string, body: unknown, headers: Record<string, string> = {}): Promise<Response> {
    return this.send('PATCH', path, body, headers)
  }

  delete(path: string, headers: Record<string, string> = {}): Promise<Response> {
    return this.send('DELETE', path, undefined, headers)
  }

  async send(method: string, path: string, body: unknown, headers: Record<string, string>): Promise<Response> {
    const reply = await fetch(this.baseUrl + path, {
      method,
      redirect: 'manual',
      headers: {
        Origin: this.baseUrl,
        ...(this.cookie ? { Cookie: this.cookie } : {}),
        ...(body === undefined ? {} : { 'Content-Type': 'application/json' }),
        ...headers,
      },
      ...(body === undefined ? {} : { body: typeof body === 'string' ? body : JSON.stringify(body) }),
    })
    for (const set of reply.headers.getSetCookie()) this.cookie = set.split(';')[0] ?? ''
    return reply
  }
}

/** The demo team's account of a role (the first of several). */
export function account(role: Role): { email: string, password: string } {
  const person = demo.people.find(candidate => candidate.role === role)
  if (!person) throw new Error(`The demo team has no ${role}.`)
  return { email: person.email, password: demo.password }
}

/** A client signed in by role or by e-mail address with the demo's password. */
export async function signIn(who: Role | `${string}@${string}`, baseUrl = theStack().baseUrl): Promise<Client> {
  const email = who === 'researcher' || who === 'student' || who === 'admin' ? account(who).email : who
  const client = new Client(baseUrl)
  const reply = await client.post('/api/session', { email, password: demo.password })
  if (reply.status !== 200) throw new Error(`Signing in as ${email} answered ${reply.status}: ${await reply.text()}`)
  return client
}

/** Queues a job; throws when it is not accepted. */
export async function submit(client: Client, spec: JobSpecInput, key: string = randomUUID()): Promise<JobDetail> {
  const reply = await client.post('/api/jobs', spec, { 'Idempotency-Key': key })
  if (reply.status !== 201) throw new Error(`Submitting answered ${reply.status}: ${await reply.text()}`)
  return jobDetailSchema.parse(await reply.json())
}

/** Reads a job. */
export async function readJob(client: Client, id: string): Promise<JobDetail> {
  const reply = await client.get(`/api/jobs/${id}`)
  if (reply.status !== 200) throw new Error(`Reading job ${id} answered ${reply.status}: ${await reply.text()}`)
  return jobDetailSchema.parse(await reply.json())
}

/** Waits until a job is over, whichever way. */
export const finished = (client: Client, id: string, withinMs = 60_000): Promise<JobDetail> =>
  waitFor(`job ${id} to end`, async () => {
    const job = await readJob(client, id)
    return job.state === 'queued' || job.state === 'running' ? null : job
  }, withinMs)

/** Waits for a condition: the first answer that is neither null, undefined nor false. Throws naming it when the time is over. */
export async function waitFor<T>(what: string, check: () => Promise<T | null | undefined | false> | T | null | undefined | false, withinMs = 20_000, everyMs = 100): Promise<T> {
  const deadline = performance.now() + withinMs
  for (;;) {
    const value = await check()
    if (value !== null && value !== undefined && value !== false) return value
    if (performance.now() > deadline) throw new Error(`Waited ${withinMs / 1000} s in vain for ${what}.`)
    await sleep(everyMs)
  }
}

const MILLITESLA = 1e-3 / 1.25663706127e-6

/** A small device of fast trials, written from parallel. */
const BASE = {
  device: {
    label: 'cell T-1', damping: 0.05, saturationMagnetization: 1e6,
    anisotropy: { kind: 'effectiveField', anisotropyField: 300 * MILLITESLA },
    thickness: 1.5e-9, diameter: 40e-9, exchangeStiffness: 20e-12, torque: { kind: 'constant', efficiency: 0.6 },
    resistanceArea: 5e-12, tunnelMagnetoresistance: 1.5,
  },
  environment: { temperature: 300 },
  write: { direction: 'parallelToAntiparallel', drive: { kind: 'current', current: 300e-6 }, width: 3e-9 },
} satisfies Omit<JobSpecInput, 'question' | 'numerics'>

/** How fast does it switch: about a hundredth of a CPU-second for each hundred trials. */
export const switchingSpec = ({ trials = 200, seed = 1 } = {}): JobSpec =>
  jobSpecSchema.parse({ ...BASE, question: { kind: 'switching', trials }, numerics: { seed } })

/** How does it move: a few paths. */
export const motionSpec = ({ paths = 4, seed = 1 } = {}): JobSpec =>
  jobSpecSchema.parse({ ...BASE, question: { kind: 'motion', paths }, numerics: { seed } })

/** How often does the write fail: some trials at each of three widths. */
export const failureSpec = ({ trials = 100, seed = 1 } = {}): JobSpec =>
  jobSpecSchema.parse({ ...BASE, question: { kind: 'failure', shortest: 1e-9, widths: 3, trials }, numerics: { seed } })
