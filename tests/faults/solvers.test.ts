import { afterEach, beforeAll, describe, expect, it } from 'vitest'
import type { JobSpec } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { cancelJob } from '../../server/models/endJobs'
import type { Job } from '../../server/models/jobs'
import { openTestRedis, switchingSpec, waitFor } from '../integration/harness'
import { figure, isAlive, since, solverOf, spends, useStage } from './stage'

const base = switchingSpec({ trials: 11_000, seed: 20_261 })
/** Three chunks of more than a CPU-second. */
const SPEC: JobSpec = { ...base, write: { ...base.write, width: 20e-9 } }
const MOST_RECOVERY_MS = 25_000
const MOST_CANCEL_MS = 2000

describe('Faults of solvers, workers and Redis', () => {
  const stage = useStage('faults-solvers')
  let undisturbed: Pick<Job, 'answer' | 'paths' | 'chunksTotal'>

  beforeAll(async () => {
    await stage().startWorker()
    undisturbed = await stage().settled(await stage().submit(SPEC, 'undisturbed'))
    expect(undisturbed.answer).toContain('"complete":true')
    expect(undisturbed.chunksTotal).toBeGreaterThanOrEqual(3)
    await stage().killWorkers()
  })

  afterEach(() => stage().killWorkers())

  /** Ended with the bytes of an undisturbed run, every chunk's result kept once, and charged once for exactly these. */
  async function expectSame(job: Job) {
    expect(job.state).toBe('done')
    expect(job.answer === undisturbed.answer, 'the answer has the bytes of an undisturbed run').toBe(true)
    expect(job.paths?.equals(undisturbed.paths ?? Buffer.alloc(0)), 'the paths have the bytes of an undisturbed run').toBe(true)
    const attempts = await stage().attempts(job.id)
    const kept = attempts.filter(({ outcome }) => outcome === 'done')
    expect(kept).toHaveLength(job.chunksTotal)
    expect(job.chunksDone).toBe(job.chunksTotal)
    const { reserve, release, charge } = await stage().ledger(job.id)
    expect([reserve?.entries, release?.entries, charge?.entries]).toEqual([1, 1, 1])
    expect((reserve?.cpuMicros ?? 0) + (release?.cpuMicros ?? 0)).toBe(0)
    expect(charge?.cpuMicros).toBe(kept.reduce((sum, { cpuMicros }) => sum + cpuMicros, 0))
    return { attempts, kept }
  }

  it('computes a chunk again whose solver was killed, with the same bytes', async () => {
    const worker = await stage().startWorker()
    const jobId = await stage().submit(SPEC, 'solver-killed')
    const struck = new Set<number>()
    const recoveries: number[] = []
    for (const cpuSeconds of [0.2, 0.5, 0.8]) {
      const struckAttempt = await stage().running(jobId, attempt => !struck.has(attempt.chunkId))
      struck.add(struckAttempt.chunkId)
      const solver = await solverOf(worker.pid)
      await spends(solver, cpuSeconds)
      process.kill(solver, 'SIGKILL')
      const killed = performance.now()
      await stage().running(jobId, attempt => attempt.id > struckAttempt.id)
      recoveries.push(performance.now() - killed)
    }
    const { attempts, kept } = await expectSame(await stage().settled(jobId))
    const lost = attempts.filter(({ outcome }) => outcome === 'lost')
    expect(lost).toHaveLength(3)
    const sum = (list: typeof attempts) => list.reduce((total, { cpuMicros }) => total + cpuMicros, 0)
    // One that is killed between two looks at the process table may leave none.
    expect(sum(lost), 'the use of killed solvers is known').toBeGreaterThan(0)
    figure('solver killed', `recovery at most ${(Math.max(...recoveries) / 1000).toFixed(2)} s, ${Math.round(100 * sum(lost) / sum(kept))} % computed again`)
  })

  it('has another worker take over from one that was killed, whose solver ends by itself', async () => {
    await stage().startWorker()
    await stage().startWorker()
    const jobId = await stage().submit(SPEC, 'worker-killed')
    // The one that leads: the other has to take over this too. Until one of them does, the lease is still a former worker's.
    const attempt = await waitFor('a running chunk of the leading worker', async () => {
      const lease = await stage().db.models.Lease.findOne({ where: { name: 'dispatcher' } })
      const attempts = await stage().attempts(jobId)
      return attempts.find(({ outcome, workerId }) => outcome === 'running' && workerId === lease?.holder)
    }, 90_000, 50)
    const worker = await stage().workerOf(attempt)
    const solver = await solverOf(worker.pid)
    await spends(solver, 0.2)
    worker.signal('SIGKILL')
    const killed = performance.now()
    await waitFor('the orphaned solver to end', () => !isAlive(solver), 5000, 20)
    const orphan = since(killed)
    const next = await stage().running(jobId, ({ chunkId, attempt: number }) => chunkId === attempt.chunkId && number === attempt.attempt + 1, 40_000)
    const recovery = performance.now() - killed
    expect(next.workerId).not.toBe(attempt.workerId)
    expect(recovery).toBeLessThan(MOST_RECOVERY_MS)
    await expectSame(await stage().settled(jobId))
    figure('worker killed', `solver ended after ${orphan}, chunk taken over after ${(recovery / 1000).toFixed(2)} s`)
  })

  it('rebuilds the queue when Redis was wiped, then killed and started again', async () => {
    await stage().startWorker()
    const jobId = await stage().submit(SPEC, 'redis-lost')
    const redis = openTestRedis(stage().stack.info)
    const before = await stage().running(jobId)
    await redis.flushall()
    redis.disconnect()
    const wiped = performance.now()
    await stage().running(jobId, ({ id }) => id > before.id)
    const rebuilt = since(wiped)
    await stage().stack.redis?.kill()
    await stage().stack.startRedis()
    const restarted = performance.now()
    await expectSame(await stage().settled(jobId))
    figure('Redis wiped and restarted', `next chunk running ${rebuilt} after the wipe, job done ${since(restarted)} after the restart`)
  })

  it('goes on when MariaDB was killed and started again in the middle of a chunk', async () => {
    const worker = await stage().startWorker()
    const jobId = await stage().submit(SPEC, 'database-killed')
    await stage().running(jobId)
    await spends(await solverOf(worker.pid), 0.2)
    await stage().stack.database?.kill()
    await stage().stack.startDatabase()
    const restarted = performance.now()
    const { attempts } = await expectSame(await stage().settled(jobId))
    expect(worker.ended).toBeNull()
    figure('MariaDB killed and restarted', `job done ${since(restarted)} after the restart, ${attempts.length - undisturbed.chunksTotal} chunks computed again`)
  })

  it('gives up a chunk that breaks down in three starts, while other jobs go on', async () => {
    const worker = await stage().startWorker()
    const doomed = await stage().submit(SPEC, 'doomed')
    const other = await stage().submit(switchingSpec({ trials: 200, seed: 5 }), 'bystander', 'admin')
    const begun = performance.now()
    const { chunkId } = await stage().running(doomed)
    for (let start = 1; start <= 3; start++) {
      await stage().running(doomed, attempt => attempt.chunkId === chunkId && attempt.attempt === start)
      process.kill(await solverOf(worker.pid), 'SIGKILL')
      await waitFor('the loss to be noted', async () => (await stage().attempts(doomed)).find(attempt => attempt.chunkId === chunkId && attempt.attempt === start && attempt.outcome === 'lost'))
    }
    const failed = await stage().settled(doomed)
    const gaveUp = since(begun)
    expect(failed.state).toBe('failed')
    expect(failed.error).toMatch(/^The solver broke down on trials \d+ to \d+ in each of 3 starts.*SIGKILL.*not charged/)
    const kept = (await stage().attempts(doomed)).filter(({ outcome }) => outcome === 'done')
    expect((await stage().ledger(doomed)).charge).toEqual({ entries: 1, cpuMicros: kept.reduce((sum, { cpuMicros }) => sum + cpuMicros, 0) })
    expect(await stage().db.models.Chunk.count({ where: { jobId: doomed, state: ['ready', 'queued', 'running'] } })).toBe(0)
    const done = await stage().settled(other)
    expect(done.state).toBe('done')
    figure('chunk that always breaks down', `given up after ${gaveUp}, the other job done ${((done.finishedAt?.getTime() ?? NaN) - done.createdAt.getTime()) / 1000} s after it was queued`)
  })

  it('fails a job at once that the engine refuses, with its reason, and does not start it again', async () => {
    const jobId = await stage().submit(switchingSpec({ trials: 100, seed: 6 }), 'refused')
    const { spec } = await stage().job(jobId)
    const tooLong = { ...jobSpecSchema.parse(JSON.parse(spec)), numerics: { seed: 6, step: { kind: 'fixed', step: 1e-10 } } }
    await stage().db.models.Job.update({ spec: JSON.stringify(tooLong) }, { where: { id: jobId } })
    await stage().startWorker()
    const job = await stage().settled(jobId)
    expect([job.state, job.answer]).toEqual(['failed', null])
    expect(job.error).toMatch(/^A step of 100 ps/)
    expect((await stage().attempts(jobId)).map(({ outcome, attempt }) => [outcome, attempt])).toEqual([['failed', 1]])
    expect((await stage().ledger(jobId)).charge?.entries).toBe(1)
  })

  it('ends the solver of a cancelled job within two seconds and charges what it used', async () => {
    const worker = await stage().startWorker()
    const jobId = await stage().submit(SPEC, 'cancelled')
    await stage().running(jobId)
    const solver = await solverOf(worker.pid)
    await spends(solver, 0.2)
    const asked = performance.now()
    expect(await cancelJob(stage().db, jobId)).toBe(true)
    await waitFor('the solver to end', () => !isAlive(solver), 10_000, 10)
    const ended = performance.now() - asked
    const job = await stage().settled(jobId, 10_000)
    expect(ended).toBeLessThan(MOST_CANCEL_MS)
    expect(job.state).toBe('cancelled')
    expect(job.answer).toBeNull()
    const attempts = await stage().attempts(jobId)
    const used = attempts.filter(({ outcome }) => outcome === 'cancelled' || outcome === 'done').reduce((sum, { cpuMicros }) => sum + cpuMicros, 0)
    expect(used).toBeGreaterThan(0)
    expect((await stage().ledger(jobId)).charge).toEqual({ entries: 1, cpuMicros: used })
    figure('cancel', `solver ended after ${(ended / 1000).toFixed(2)} s, settled after ${since(asked)}`)
  })
})
