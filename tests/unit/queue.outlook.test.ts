import { describe, expect, it } from 'vitest'
import { COVERAGE, boundsOf, paceOfChunks, stageOf } from '../../server/queue/experience'
import type { Scored } from '../../server/queue/experience'
import { isNews } from '../../server/queue/foretell'
import { missOf, outlooks, rangeOf } from '../../server/queue/outlook'
import type { Flying, OpenJob, Snapshot } from '../../server/queue/outlook'
import { waitingWords } from '../../server/queue/waitingWords'

const PACE = { use: { mean: 0, sd: 0.1 }, stretch: { mean: 0, sd: 0.1 } }
const NORMAL = () => [-1.2816, 1.2816] as const
const open = (id: string, userId: string, chunks: number, over: Partial<OpenJob> = {}): OpenJob => ({ id, userId, queued: true, chunkMicros: 2e6, ready: chunks, done: 0, doneMicros: 0, ...over })
const flies = (jobId: string, over: Partial<Flying> = {}): Flying => ({ jobId, running: true, priceMicros: 2e6, progress: 0.5, elapsedSeconds: 1, ...over })
const picture = (over: Partial<Snapshot>): Snapshot =>
  ({ slots: 2, mending: false, virtualNow: 0, virtualTimes: new Map(), jobs: [], flying: [], pace: PACE, bounds: { queued: NORMAL, running: NORMAL }, ...over })
const busy = [open('a', 'ada', 10, { queued: false }), open('b', 'ada', 2), open('c', 'bo', 2)]

describe('why a job waits', () => {
  it('names workers that are missing, before all else', () => {
    const said = outlooks(picture({ slots: 0, jobs: busy, mending: true }))
    expect(said.get('b')).toMatchObject({ waiting: { reason: 'noWorkers', jobsBefore: 1, cpuMicrosBefore: 20e6 }, prediction: null })
  })

  it('says that the queue is mended, and foretells nothing then', () => {
    expect(outlooks(picture({ jobs: busy, flying: [flies('a'), flies('a')], mending: true })).get('c')).toMatchObject({ waiting: { reason: 'mending' }, prediction: null })
  })

  it('says of a job next to a free slot that it starts', () => {
    expect(outlooks(picture({ jobs: [open('a', 'ada', 1)] })).get('a')!.waiting).toEqual({ reason: 'starting', jobsBefore: 0, ownBefore: 0, cpuMicrosBefore: 0 })
  })

  it('counts what runs and is handed out before it', () => {
    const said = outlooks(picture({ jobs: [open('a', 'ada', 0, { queued: false }), open('c', 'bo', 2)], flying: [flies('a'), flies('a')] }))
    expect(said.get('c')!.waiting).toEqual({ reason: 'busy', jobsBefore: 1, ownBefore: 0, cpuMicrosBefore: 2e6 })
    expect(said.get('a')!.waiting).toBeNull()
  })

  it('tells one’s own earlier jobs from the fair order', () => {
    const said = outlooks(picture({ jobs: busy, flying: [flies('a'), flies('a')], virtualTimes: new Map([['ada', 0], ['bo', 5e6]]) }))
    expect(said.get('b')!.waiting).toMatchObject({ reason: 'own', ownBefore: 1 })
    expect(said.get('c')!.waiting).toMatchObject({ reason: 'share', ownBefore: 0 })
  })

  it('gives whoever was idle no credit and no debt', () => {
    const jobs = [open('a', 'ada', 50, { queued: false }), open('c', 'bo', 1)]
    const said = outlooks(picture({ jobs, flying: [flies('a'), flies('a')], virtualNow: 90e6, virtualTimes: new Map([['ada', 94e6], ['bo', 0]]) }))
    expect(said.get('c')!.waiting).toMatchObject({ reason: 'busy', cpuMicrosBefore: 2e6 })
  })

  it.each(['starting', 'noWorkers', 'busy', 'own', 'share', 'mending'] as const)('has a sentence for %s', (reason) => {
    for (const slots of [1, 2, 8]) expect(waitingWords(reason, { slots, ownBefore: slots })).toMatch(/^[A-Z0-9].*\.$/)
  })
})

describe('when a job ends', () => {
  it('follows from the work left, the slots and the fair order', () => {
    const alone = outlooks(picture({ jobs: [open('a', 'ada', 10)] })).get('a')!.prediction!
    expect(alone.median).toBeGreaterThan(10)
    expect(alone.median).toBeLessThan(11.5)
    const shared = outlooks(picture({ jobs: [open('a', 'ada', 10), open('b', 'bo', 10)] }))
    for (const id of ['a', 'b']) expect(shared.get(id)!.prediction!.median / alone.median).toBeCloseTo(2, 0)
    const behind = outlooks(picture({ jobs: [open('a', 'ada', 10), open('b', 'ada', 10)] }))
    expect(behind.get('a')!.prediction!.median).toBeCloseTo(alone.median, 0)
    expect(behind.get('b')!.prediction!.median).toBeGreaterThan(1.8 * alone.median)
  })

  it('holds to a job’s own pace as soon as there is one', () => {
    const slow = open('a', 'ada', 10, { queued: false, done: 30, doneMicros: 180e6 })
    const median = outlooks(picture({ jobs: [slow] })).get('a')!.prediction!.median
    expect(median).toBeGreaterThan(27)
    expect(median).toBeLessThan(32)
  })

  it('gives a range that narrows with the work done', () => {
    const early = outlooks(picture({ jobs: [open('a', 'ada', 40)] })).get('a')!.prediction!
    const late = outlooks(picture({ jobs: [open('a', 'ada', 40, { queued: false, done: 40, doneMicros: 80e6 })] })).get('a')!.prediction!
    expect(late.spread).toBeLessThan(early.spread)
    for (const { low, median, high } of [early, late]) expect([low < median, median < high]).toEqual([true, true])
  })

  it('is told of jobs whose parts are all in, and of very long queues as of short ones', () => {
    expect(outlooks(picture({ jobs: [open('a', 'ada', 0, { queued: false, done: 4, doneMicros: 8e6 })] })).get('a')!.prediction!.median).toBeLessThan(1)
    const jobs = Array.from({ length: 3000 }, (_, k) => open(`j${k}`, `u${k % 20}`, 100))
    const said = outlooks(picture({ jobs, slots: 8 }))
    const last = Math.max(...[...said.values()].map(({ prediction }) => prediction!.median))
    expect(last / (3000 * 100 * 2 / 8)).toBeGreaterThan(0.95)
    expect(last / (3000 * 100 * 2 / 8)).toBeLessThan(1.2)
  })
})

describe('what past ends teach', () => {
  /** Numbers of a fixed sequence that look random, uniform in 0 to 1. */
  const sequence = () => {
    let state = 1
    return () => (state = (state * 48_271) % 2_147_483_647) / 2_147_483_647
  }
  const normal = (draw: () => number) => Math.sqrt(-2 * Math.log(draw())) * Math.cos(2 * Math.PI * draw())

  it.each([
    ['that scatter more than thought', (draw: () => number) => 0.6 * normal(draw)],
    ['that scatter less', (draw: () => number) => 0.05 * normal(draw)],
    ['that are all late', (draw: () => number) => 0.4 + 0.1 * normal(draw)],
    ['with a long tail', (draw: () => number) => -0.3 * Math.log(draw())],
  ])('brings four of five coming ones into the range, for ends %s', (_, error) => {
    const draw = sequence()
    const scored: Scored[] = []
    let inside = 0
    for (let k = 0; k < 2000; k++) {
      const median = 20 + 40 * draw()
      const spread = 0.2
      const actual = (median + 1) * Math.exp(error(draw)) - 1
      const { low, high } = rangeOf(median, spread, boundsOf(scored.slice(0, 400)).queued(median))
      if (k >= 400 && actual >= low && actual <= high) inside++
      scored.unshift({ stage: 0, median, spread, actual })
    }
    expect(Math.abs(inside / 1600 - COVERAGE)).toBeLessThan(0.04)
  })

  it('keeps waiting and running apart', () => {
    const late = Array.from({ length: 200 }, (): Scored => ({ stage: 0, median: 10, spread: 0.1, actual: 40 }))
    const bounds = boundsOf(late)
    expect(bounds.queued(10)[1]).toBeGreaterThan(10)
    expect(bounds.running(10)[1]).toBeLessThan(3)
    expect(boundsOf([]).queued(10)).toEqual(bounds.running(10))
  })

  it('lets short jobs teach nothing about long ones', () => {
    const bounds = boundsOf(Array.from({ length: 200 }, (): Scored => ({ stage: 0, median: 0.5, spread: 0.2, actual: 12 })))
    expect(bounds.queued(0.6)[1]).toBeGreaterThan(5)
    expect(bounds.queued(600)).toEqual(boundsOf([]).queued(600))
  })

  it('measures a miss in spreads', () => {
    expect(missOf(rangeOf(20, 0.3, [-2, 1.5]).high, 20, 0.3)).toBeCloseTo(1.5, 9)
    expect(missOf(rangeOf(20, 0.3, [-2, 1.5]).low, 20, 0.3)).toBeCloseTo(-2, 9)
  })

  it('learns the pace of chunks, and little from few', () => {
    const chunk = { priceMicros: 2e6, cpuMicros: 3e6, wallSeconds: 6.04 }
    const many = paceOfChunks(Array.from({ length: 300 }, () => chunk))
    expect(Math.exp(many.use.mean)).toBeCloseTo(1.5, 1)
    expect(Math.exp(many.stretch.mean)).toBeCloseTo(2, 1)
    const one = paceOfChunks([chunk])
    expect(one.use.mean).toBeLessThan(many.use.mean / 2)
    expect(one.use.sd).toBeGreaterThan(many.use.sd)
    expect(paceOfChunks([{ priceMicros: 0, cpuMicros: 0, wallSeconds: 0 }])).toEqual(paceOfChunks([]))
  })

  it('takes a prediction at each tenth of a job', () => {
    expect([stageOf(true, 0), stageOf(false, 0), stageOf(false, 0.55), stageOf(false, 1)]).toEqual([0, 1, 6, 10])
  })
})

describe('news of an outlook', () => {
  const at = Date.parse('2026-11-28T10:00:00Z')
  const told = (low: number, high: number, jobsBefore = 1) => ({
    id: '01ARZ3NDEKTSV4RRFFQ69G5FAV', waiting: { reason: 'busy' as const, words: 'Both slots are busy.', jobsBefore, cpuSecondsBefore: 3 },
    eta: { low: new Date(at + low * 1000).toISOString(), high: new Date(at + high * 1000).toISOString() },
  })

  it('are another place or a range that has moved, not a second more or less', () => {
    expect(isNews(undefined, told(10, 20), at)).toBe(true)
    expect(isNews(told(10, 20), told(11, 21), at)).toBe(false)
    expect(isNews(told(10, 20), told(10, 24), at)).toBe(true)
    expect(isNews(told(100, 200), told(110, 215), at)).toBe(false)
    expect(isNews(told(10, 20), told(10, 20, 2), at)).toBe(true)
    expect(isNews(told(10, 20), { ...told(10, 20), eta: null }, at)).toBe(true)
  })
})
