import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { DEFAULT_SPEC } from '~/utils/bench/draft'
import { PreviewQueue, type PreviewReply, type PreviewRequest, type PreviewWorker } from '~/utils/bench/preview'

/** A worker whose answers the test gives. */
class HeldWorker implements PreviewWorker {
  asked: PreviewRequest[] = []
  ended = false
  onmessage: PreviewWorker['onmessage'] = null
  onerror: PreviewWorker['onerror'] = null
  postMessage(request: PreviewRequest) { this.asked.push(request) }
  terminate() { this.ended = true }
  answer(kind: 'numbers' | 'path' | 'errors', id = this.asked[this.asked.length - 1]!.id) {
    const spec = this.asked.find(request => request.id === id)!.spec
    this.onmessage?.({
      data: kind === 'numbers'
        ? { id, kind, numbers: { spec, numbers: [], cautions: [], energy: { stability: 1, diagonal: [0, 0, 1], field: [0, 0, 0] }, plan: { trials: 1, step: 1, phaseStep: 1, stepFrom: 'bias', stepsPerTrial: 1, trialSteps: 1 }, cpuSeconds: 1 } }
        : kind === 'errors'
          ? { id, kind, errors: { spec, rule: 'afterSettling', solution: null, reason: 'a test', elapsedMs: 1 } }
          : { id, kind, path: { spec, path: { startAngle: 0, time: [], m: [], crossing: null, endsFar: false }, elapsedMs: 1 } },
    })
  }
}

const spec = (seed: number) => ({ ...DEFAULT_SPEC, numerics: { ...DEFAULT_SPEC.numerics, seed } })

describe('previews', () => {
  let workers: HeldWorker[] = []
  let replies: PreviewReply[] = []
  let queue: PreviewQueue
  const seeds = () => replies.map(reply => reply.kind === 'path' ? reply.path.spec.numerics.seed : reply.kind === 'numbers' ? -reply.numbers.spec.numerics.seed : reply.kind === 'errors' ? 1000 + reply.errors.spec.numerics.seed : NaN)

  beforeEach(() => {
    vi.useFakeTimers()
    workers = []
    replies = []
    queue = new PreviewQueue(() => {
      const worker = new HeldWorker()
      workers.push(worker)
      return worker
    }, reply => replies.push(reply))
  })
  afterEach(() => {
    queue.end()
    vi.useRealTimers()
  })

  it('come as numbers first, the path and the write errors after', () => {
    queue.ask(spec(1), 1e-7)
    workers[0]!.answer('numbers')
    workers[0]!.answer('path')
    workers[0]!.answer('errors')
    expect(seeds()).toEqual([-1, 1, 1001])
  })

  it('ask the newest only and drop what was replaced', () => {
    for (const seed of [1, 2, 3]) queue.ask(spec(seed), 1e-7)
    expect(workers[0]!.asked).toHaveLength(1)
    workers[0]!.answer('numbers')
    workers[0]!.answer('path')
    expect(workers[0]!.asked).toHaveLength(1)
    workers[0]!.answer('errors')
    expect(replies).toEqual([])
    expect(workers[0]!.asked.map(request => request.spec.numerics.seed)).toEqual([1, 3])
    workers[0]!.answer('path')
    expect(seeds()).toEqual([3])
  })

  it('give up a worker that is lost in a long path while something newer waits', () => {
    queue.ask(spec(1), 1e-7)
    queue.ask(spec(2), 1e-7)
    vi.advanceTimersByTime(1000)
    expect(workers[0]!.ended).toBe(true)
    expect(workers[1]!.asked.map(request => request.spec.numerics.seed)).toEqual([2])
    workers[0]!.answer('path')
    expect(replies).toEqual([])
    workers[1]!.answer('path')
    expect(seeds()).toEqual([2])
  })

  it('wait for a long path when nothing newer is asked', () => {
    queue.ask(spec(1), 1e-7)
    vi.advanceTimersByTime(60_000)
    expect(workers[0]!.ended).toBe(false)
    workers[0]!.answer('path')
    expect(seeds()).toEqual([1])
  })

  it('are forgotten when the draft stops making sense', () => {
    queue.ask(spec(1), 1e-7)
    queue.forget()
    workers[0]!.answer('path')
    workers[0]!.answer('errors')
    expect(replies).toEqual([])
    queue.ask(spec(2), 1e-7)
    workers[0]!.answer('path')
    expect(seeds()).toEqual([2])
  })

  it('say when a worker fails, and go on', () => {
    queue.ask(spec(1), 1e-7)
    workers[0]!.onerror?.({ message: 'no such thing' })
    expect(replies).toMatchObject([{ kind: 'failed', message: 'no such thing' }])
    queue.ask(spec(2), 1e-7)
    workers[0]!.answer('path')
    expect(seeds()[1]).toBe(2)
  })
})
