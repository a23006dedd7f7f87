import { QueryTypes } from 'sequelize'
import { describe, expect, it } from 'vitest'
import { openChunk, mergeChunks } from '#shared/physics/engine'
import type { JobSpec } from '#shared/schemas/job'
import { finishChunk } from '../../server/queue/attempts'
import type { ClaimedChunk } from '../../server/queue/claim'
import { claimChunk } from '../../server/queue/claim'
import { openChunkQueue } from '../../server/queue/chunkQueue'
import { dispatch } from '../../server/queue/dispatch'
import { worksOn } from '../../server/queue/fleet'
import type { Merge } from '../../server/queue/merge'
import { mergeJob } from '../../server/queue/merge'
import { fenceSilent } from '../../server/queue/reconcile'
import { packPaths } from '../../server/models/results'
import { readSettings } from '#shared/schemas/settings'
import { switchingSpec } from '../integration/harness'
import { figure, useStage } from './stage'

const integrate = ({ spec, firstTrial, trialCount }: Pick<ClaimedChunk, 'spec' | 'firstTrial' | 'trialCount'>): Uint8Array => {
  const run = openChunk(spec, firstTrial, trialCount)
  while (run.done < run.total) run.advance()
  return run.finish()
}

const merge: Merge = (spec: JobSpec, parts) => {
  const { answer, paths } = mergeChunks(spec, parts)
  return Promise.resolve({ answer: JSON.stringify(answer), headline: answer.words.headline, paths: packPaths(answer, paths) })
}

describe('Records that outlive a fault', () => {
  const stage = useStage('faults-records')

  async function onlyChunk(jobId: string): Promise<number> {
    const chunks = await stage().db.models.Chunk.findAll({ where: { jobId }, attributes: ['id'] })
    expect(chunks).toHaveLength(1)
    return chunks[0]?.id ?? 0
  }

  async function claim(workerId: string, chunkId: number): Promise<ClaimedChunk> {
    const claimed = await claimChunk(stage().db, workerId, chunkId)
    if (!claimed) throw new Error(`Chunk ${chunkId} could not be claimed.`)
    return claimed
  }

  it('refuse the late result of a worker that was away while another took over', async () => {
    const { db } = stage()
    const jobId = await stage().submit(switchingSpec({ trials: 100, seed: 41 }), 'late-result')
    const chunkId = await onlyChunk(jobId)
    const first = await claim('worker-a', chunkId)
    expect(await claimChunk(db, 'worker-b', chunkId), 'a chunk that runs is nobody else’s').toBeNull()
    expect(await fenceSilent(db)).toEqual({ fenced: 0, givenUp: 0 })
    await db.models.Chunk.update({ heartbeatAt: new Date(Date.now() - 16_000) }, { where: { id: chunkId } })
    expect(await fenceSilent(db)).toEqual({ fenced: 1, givenUp: 0 })
    const second = await claim('worker-b', chunkId)
    expect([first.attempt, second.attempt]).toEqual([1, 2])
    const payload = integrate(second)
    expect(await finishChunk(db, first, Uint8Array.of(1, 2, 3), 5_000_000)).toBe('fenced')
    expect(await finishChunk(db, second, payload, 20_000)).toBe('last')
    expect(await finishChunk(db, second, payload, 20_000), 'nor twice').toBe('fenced')
    expect(await mergeJob(db, jobId, merge)).toBe('merged')
    const job = await stage().settled(jobId)
    expect([job.state, job.cpuMicros, job.chunksDone]).toEqual(['done', 20_000, 1])
    expect((await stage().ledger(jobId)).charge).toEqual({ entries: 1, cpuMicros: 20_000 })
    figure('worker away, then back', '2 of 2 late writes refused')
  })

  it('are not trusted when a stored byte has changed: the chunk is computed again', async () => {
    const { db } = stage()
    const spec = switchingSpec({ trials: 100, seed: 42 })
    const jobId = await stage().submit(spec, 'flipped-byte')
    const chunkId = await onlyChunk(jobId)
    const first = await claim('worker-a', chunkId)
    const payload = integrate(first)
    expect(await finishChunk(db, first, payload, 10_000)).toBe('last')
    const flipped = Buffer.from(payload)
    flipped[flipped.length >> 1] = (flipped[flipped.length >> 1] ?? 0) ^ 1
    await db.models.Chunk.update({ payload: flipped }, { where: { id: chunkId } })
    expect(await mergeJob(db, jobId, merge)).toBe('recompute')
    expect(await db.models.Job.findByPk(jobId, { raw: true })).toMatchObject({ state: 'running', chunksDone: 0, cpuMicros: 0, answer: null })
    const second = await claim('worker-a', chunkId)
    expect(await finishChunk(db, second, integrate(second), 11_000)).toBe('last')
    expect(await mergeJob(db, jobId, merge)).toBe('merged')
    const job = await stage().settled(jobId)
    expect(job.answer).toBe((await merge(spec, [payload])).answer)
    expect((await stage().ledger(jobId)).charge).toEqual({ entries: 1, cpuMicros: 11_000 })
    figure('stored partial result with a flipped byte', '1 of 1 detected and computed again')
  })

  it('take one answer when several workers merge at once', async () => {
    const { db } = stage()
    const jobId = await stage().submit(switchingSpec({ trials: 100, seed: 43 }), 'merged-at-once')
    const claimed = await claim('worker-a', await onlyChunk(jobId))
    await finishChunk(db, claimed, integrate(claimed), 10_000)
    const results = await Promise.all([1, 2, 3].map(() => mergeJob(db, jobId, merge)))
    expect(results.sort()).toEqual(['merged', 'nothing to do', 'nothing to do'])
    const { release, charge } = await stage().ledger(jobId)
    expect([release?.entries, charge?.entries]).toEqual([1, 1])
  })

  it('fail a job at once, with the reason, when it was made for another engine', async () => {
    const { db } = stage()
    const jobId = await stage().submit(switchingSpec({ trials: 100, seed: 44 }), 'other-engine')
    const chunkId = await onlyChunk(jobId)
    await db.models.Job.update({ engineVersion: '0.9.0' }, { where: { id: jobId } })
    expect(await claimChunk(db, 'worker-a', chunkId)).toBeNull()
    const job = await stage().settled(jobId, 1000)
    expect([job.state, (await stage().ledger(jobId)).charge?.cpuMicros]).toEqual(['failed', 0])
    expect(job.error).toContain('engine 0.9.0')
  })

  it('hand out chunks fairly: a newcomer beside a long job is next, and none is handed out twice', async () => {
    const { db, stack } = stage()
    const queue = openChunkQueue(readSettings(stack.info.env).redis, () => undefined)
    try {
      await worksOn(db, { id: 'worker-a', host: 'here', pid: 1, slots: 2 })
      const long = await stage().submit(switchingSpec({ trials: 500_000, seed: 45 }), 'long')
      const order: string[] = []
      const handOut = async () => {
        await dispatch(db, queue)
        const next = await db.models.Chunk.findOne({ where: { state: 'queued' }, attributes: ['id', 'jobId'], order: [['queuedAt', 'ASC'], ['id', 'ASC']] })
        if (!next) throw new Error('Nothing was handed out.')
        order.push(next.jobId)
        const claimed = await claim('worker-a', next.id)
        await finishChunk(db, claimed, Uint8Array.of(order.length), 1_000_000)
      }
      for (let k = 0; k < 6; k++) await handOut()
      const short = await stage().submit(switchingSpec({ trials: 100_000, seed: 46 }), 'short', 'admin')
      for (let k = 0; k < 6; k++) await handOut()
      const place = order.slice(6).indexOf(short)
      expect(order.slice(0, 6).every(id => id === long)).toBe(true)
      expect(place, 'chunks handed out before the newcomer’s first').toBeGreaterThanOrEqual(0)
      expect(place, 'chunks handed out before the newcomer’s first').toBeLessThanOrEqual(3)
      const [twice] = await db.sequelize.query<{ most: number }>('SELECT MAX(starts) AS most FROM chunks', { type: QueryTypes.SELECT })
      expect(twice?.most).toBe(2)
      figure('newcomer beside a long job', `served after ${place} chunks of 2 slots`)
    }
    finally {
      await queue.close()
    }
  })
})
