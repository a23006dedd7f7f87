import { readFileSync, readdirSync } from 'node:fs'
import { QueryTypes } from 'sequelize'
import { afterAll, beforeAll } from 'vitest'
import type { JobSpec } from '#shared/schemas/job'
import { ENGINE_VERSION } from '#shared/physics/engine'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import type { Attempt, Job } from '../../server/models/jobs'
import { submitJob } from '../../server/models/submit'
import type { Running } from '../../server/launch/processes.mjs'
import { account, openTestDatabase, waitFor } from '../integration/harness'
import { TestStack } from '../integration/testStack'

/** Price that the tests set, so that no worker measures one and jobs are cut alike on every machine. CPU-seconds a trial-step. */
const PRICE = 1.2e-7

/** An installation whose parts a test kills and starts. */
export class Stage {
  private constructor(readonly stack: TestStack, readonly db: Database) {}

  /** Starts MariaDB and Redis, and as many web servers; workers and a mail server are each test's own. */
  static async open(name: string, webs: number): Promise<Stage> {
    const stack = await TestStack.start(name, { workers: 0, webs, mail: false })
    const db = openTestDatabase(stack.info)
    await db.models.CalibrationRow.upsert({ engineVersion: ENGINE_VERSION, secondsPerTrialStep: PRICE, measuredAt: new Date() })
    return new Stage(stack, db)
  }

  async close(): Promise<void> {
    await closeDatabase(this.db)
    await this.stack.stop()
  }

  /** Starts a worker of one slot. */
  startWorker(slots = 1): Promise<Running> {
    return this.stack.startWorker({ FARPOLE_WORKER_SLOTS: String(slots) })
  }

  /** Ends all workers at once, solvers included. */
  async killWorkers(): Promise<void> {
    await Promise.all(this.stack.workers.filter(worker => !worker.ended).map(worker => worker.kill()))
  }

  /** Queues a job by the door that the API uses. */
  async submit(spec: JobSpec, key: string, who: 'researcher' | 'admin' = 'researcher'): Promise<string> {
    const user = await this.db.models.User.findOne({ where: { email: account(who).email }, rejectOnEmpty: true })
    return (await submitJob(this.db, { userId: user.id, teamId: user.teamId, spec, idempotencyKey: key })).jobId
  }

  job(id: string): Promise<Job> {
    return this.db.models.Job.findByPk(id, { rejectOnEmpty: true })
  }

  /** Waits until a job has ended and is settled. */
  settled(id: string, withinMs = 120_000): Promise<Job> {
    return waitFor(`job ${id} to end and be settled`, async () => {
      const job = await this.db.models.Job.findByPk(id, { attributes: ['settledAt'], rejectOnEmpty: true })
      return job.settledAt ? this.job(id) : null
    }, withinMs)
  }

  /** All attempts at a job's chunks, oldest first. */
  attempts(jobId: string): Promise<Attempt[]> {
    return this.db.sequelize.query(`
      SELECT attempts.* FROM attempts JOIN chunks ON chunks.id = attempts.chunkId WHERE chunks.jobId = :jobId ORDER BY attempts.id`,
    { replacements: { jobId }, model: this.db.models.Attempt, mapToModel: true })
  }

  /** Waits for an attempt at one of a job's chunks that is under way. */
  running(jobId: string, other: (attempt: Attempt) => boolean = () => true, withinMs = 90_000): Promise<Attempt> {
    return waitFor(`a running chunk of job ${jobId}`, async () => (await this.attempts(jobId)).find(attempt => attempt.outcome === 'running' && other(attempt)), withinMs, 20)
  }

  /** The process of the worker that made an attempt. */
  async workerOf(attempt: Attempt): Promise<Running> {
    const row = await this.db.models.WorkerRow.findByPk(attempt.workerId, { rejectOnEmpty: true })
    const worker = this.stack.workers.find(({ pid }) => pid === row.pid)
    if (!worker) throw new Error(`No worker of this test has process ${row.pid}.`)
    return worker
  }

  /** Entries of a job in the ledger, by kind: how many, and their sum in CPU microseconds. */
  async ledger(jobId: string): Promise<Record<string, { entries: number, cpuMicros: number }>> {
    const rows = await this.db.sequelize.query<{ kind: string, entries: number, cpuMicros: number }>(
      'SELECT kind, COUNT(*) AS entries, CAST(SUM(cpuMicros) AS SIGNED) AS cpuMicros FROM ledger WHERE jobId = :jobId GROUP BY kind',
      { replacements: { jobId }, type: QueryTypes.SELECT })
    return Object.fromEntries(rows.map(({ kind, entries, cpuMicros }) => [kind, { entries, cpuMicros }]))
  }
}

/** Opens a stage for the tests of a file and closes it after them. */
export function useStage(name: string, webs = 0): () => Stage {
  let stage: Stage | undefined
  beforeAll(async () => {
    stage = await Stage.open(name, webs)
  })
  afterAll(async () => {
    await stage?.close()
  })
  return () => {
    if (!stage) throw new Error('The stage is not open.')
    return stage
  }
}

interface ProcessRow { pid: number, parent: number, state: string, cpuTicks: number }

function processRow(pid: number): ProcessRow | null {
  try {
    const stat = readFileSync(`/proc/${pid}/stat`, 'utf8')
    const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ')
    return { pid, parent: Number(fields[1]), state: fields[0] ?? '', cpuTicks: Number(fields[11]) + Number(fields[12]) }
  }
  catch {
    return null
  }
}

/** Whether a process is there and no zombie. */
export const isAlive = (pid: number): boolean => (processRow(pid)?.state ?? 'Z') !== 'Z'

/** Solver processes of a worker. */
export function solversOf(workerPid: number): number[] {
  return readdirSync('/proc').filter(name => /^\d+$/.test(name)).map(Number).filter((pid) => {
    if (processRow(pid)?.parent !== workerPid) return false
    try {
      return readFileSync(`/proc/${pid}/cmdline`, 'utf8').includes('compute.mjs')
    }
    catch {
      return false
    }
  })
}

/** The solver of a worker of one slot. */
export const solverOf = (workerPid: number): Promise<number> =>
  waitFor(`the solver of worker ${workerPid}`, () => solversOf(workerPid).find(isAlive), 10_000, 20)

/** Waits until a process has used so many more CPU-seconds, or has ended. */
export async function spends(pid: number, cpuSeconds: number): Promise<void> {
  const start = processRow(pid)?.cpuTicks ?? 0
  await waitFor(`process ${pid} to spend ${cpuSeconds} CPU-seconds`, () => {
    const now = processRow(pid)
    return now === null || now.cpuTicks - start >= 100 * cpuSeconds
  }, 90_000, 10)
}

/** Prints a figure of a fault test. */
export const figure = (what: string, value: string): void => console.log(`fault: ${what}: ${value}`)

/** Seconds since a moment of `performance.now()`, in words. */
export const since = (moment: number): string => `${((performance.now() - moment) / 1000).toFixed(2)} s`
