import { describe, expect, it } from 'vitest'
import { chunkJob, mergeChunks, openChunk, planJob } from '#shared/physics/engine'
import { PhysicsError } from '#shared/physics/errors'
import { extrapolated } from '#shared/physics/failure'
import { proportion } from '#shared/numerics/statistics'
import type { JobSpec } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { sentence } from '#shared/utils/sentence'
import { failureFigure } from '~/utils/figure/failure'
import { reducedSpec } from '../support/specs'

const base = reducedSpec({ stability: 40, drive: 2, width: 5, trials: 100, damping: 0.1 })
const spec = (question: Partial<Extract<JobSpec['question'], { kind: 'failure' }>> = {}): JobSpec => jobSpecSchema.parse({
  ...base, question: { kind: 'failure', shortest: base.write.width / 5, widths: 3, trials: 600, ...question },
})
function run(job: JobSpec, first: number, count: number): Uint8Array {
  const chunk = openChunk(job, first, count)
  while (chunk.done < chunk.total) chunk.advance()
  return chunk.finish()
}

describe('how often the write fails', () => {
  it('counts trials at each width and holds them against the solution, the same bytes whatever the cut', () => {
    const job = spec()
    const whole = mergeChunks(job, [0, 1, 2].map(k => run(job, 600 * k, 600)))
    const cut = mergeChunks(job, [run(job, 1200, 250), run(job, 0, 600), run(job, 1450, 350), run(job, 600, 600)])
    expect(JSON.stringify(cut.answer)).toBe(JSON.stringify(whole.answer))
    const { answer } = whole
    if (answer.kind !== 'failure' || answer.solution.kind !== 'solved') throw new TypeError('nothing was solved')
    expect(answer.complete).toBe(true)
    expect(answer.checks.map(check => check.width / base.write.width)).toEqual([0.2, 0.6, 1].map(share => expect.closeTo(share, 8)))
    for (const { trials, solved } of answer.checks) {
      expect(trials).toBe(600)
      expect(Math.abs(solved!.apart)).toBeLessThan(4)
    }
    // (Δ, i, τ) = (40, 2, 5) and (40, 2, 3): a spectral and a finite-volume solution that agree; physics checks in tests/reference.
    expect(answer.checks[2]!.solved!.value / 1.3331695e-3).toBeCloseTo(1, 4)
    expect(answer.needed).toMatchObject({ from: 'solution', standardError: null })
    const figure = failureFigure(answer, 'job')
    const points = figure.layers.find(layer => layer.kind === 'points')!
    expect(points.points.map(({ bound }) => bound === true)).toEqual(answer.checks.map(({ failures }) => failures.afterSettling.count === 0))
    expect(figure.marks.find(mark => mark.axis === 'x')!.at).toBeCloseTo(answer.needed!.width * 1e9, 6)
    expect(figure.y.domain[0]).toBeLessThanOrEqual(1e-12)
    expect(answer.words.headline).toMatch(/^A write error of 1 × 10⁻⁹ needs a pulse of [\d.]+\sns\.$/u)
  })

  it('says so while some trials are missing, and has no count of a width without any', () => {
    const job = spec()
    const { answer } = mergeChunks(job, [run(job, 0, 600), run(job, 600, 100)])
    if (answer.kind !== 'failure') throw new TypeError('another answer')
    expect(answer.complete).toBe(false)
    expect(answer.checks.map(check => check.trials)).toEqual([600, 100])
    expect(answer.words.detail).toContain('700 trials at 2 widths so far')
  })

  it('is cut into chunks that hold trials of one width each, and all of them', () => {
    const job = spec({ trials: 5000 })
    const plan = planJob(job)
    expect(plan.trials).toBe(15_000)
    const chunks = chunkJob(job, 1e-6, plan)
    expect(chunks.reduce((sum, { trialCount }) => sum + trialCount, 0)).toBe(15_000)
    chunks.forEach(({ firstTrial, trialCount }, k) => {
      expect(firstTrial).toBe(chunks.slice(0, k).reduce((sum, chunk) => sum + chunk.trialCount, 0))
      expect(Math.floor(firstTrial / 5000)).toBe(Math.floor((firstTrial + trialCount - 1) / 5000))
    })
  })

  it('refuses widths that make no range beside the entry at fault', () => {
    for (const [question, at] of [[{ shortest: base.write.width }, 'shortest'], [{ trials: 1_000_000 }, 'trials']] as const) {
      try {
        planJob(spec(question))
        expect.unreachable()
      }
      catch (error) {
        if (!(error instanceof PhysicsError)) throw error
        expect(error.path).toEqual(['question', at])
      }
    }
  })

  it('extrapolates where nothing is solved, with its error, from widths where some but few failed', () => {
    const tilted: JobSpec = { ...spec(), device: { ...spec().device, referenceTilt: 0.1 } }
    const { answer } = mergeChunks(tilted, [0, 1, 2].map(k => run(tilted, 600 * k, 600)))
    if (answer.kind !== 'failure') throw new TypeError('another answer')
    expect(answer.solution).toEqual({ kind: 'missing', reason: 'the reference layer is tilted' })
    // Counts on a straight line: errors e^(−2 w), so that 1e-9 is met at ½ ln 1e9.
    const points = [2, 3, 4].map(width => ({ width, counted: proportion(Math.round(1e6 * Math.exp(-2 * width)), 1_000_000) }))
    const found = extrapolated(points, 1e-9)!
    expect(found.from).toBe('extrapolation')
    expect(found.width).toBeCloseTo(Math.log(1e9) / 2, 1)
    expect(found.standardError).toBeGreaterThan(0.001)
    expect(Math.abs(found.width - Math.log(1e9) / 2)).toBeLessThan(3 * found.standardError!)
    expect(extrapolated(points.slice(0, 2), 1e-9)).toBeNull()
  })

  it('reads as a sentence', () => {
    expect(sentence(spec())).toMatch(/^How often does .+ fail to switch from parallel to antiparallel under .+ to .+, checked by 600 trials at each of 3 widths\?$/)
  })
})
