import { describe, expect, it } from 'vitest'
import { agreement, standardErrorsApart } from '#shared/physics/agreement'
import { mergeChunks, openChunk } from '#shared/physics/engine'
import { prepareProblem } from '#shared/physics/problem'
import { collinearProblem, widthForError, writeErrorCurve, writeErrors } from '#shared/physics/writeError'
import type { JobSpec } from '#shared/schemas/job'
import { reducedSpec } from '../support/specs'

describe('standard errors between a count and a probability', () => {
  it('is the normal one where many are counted', () => {
    expect(standardErrorsApart({ count: 10_300, of: 100_000 }, 0.1)).toBeCloseTo(300 / Math.sqrt(9000), 1)
    expect(standardErrorsApart({ count: 9_700, of: 100_000 }, 0.1)).toBeCloseTo(-300 / Math.sqrt(9000), 1)
  })

  it('is the exact chance where few are, and none where none are expected', () => {
    // Chance of at least one: 1e-3; of two or more 5e-7. Quantile of ½(1e-3 + 5e-7), by hand: 3.289.
    expect(standardErrorsApart({ count: 1, of: 1000 }, 1e-6)).toBeCloseTo(3.29, 2)
    expect(Math.abs(standardErrorsApart({ count: 0, of: 1000 }, 1e-6))).toBeLessThan(0.01)
    expect(standardErrorsApart({ count: 0, of: 1000 }, 0)).toBe(0)
    expect(standardErrorsApart({ count: 3, of: 1000 }, 0)).toBeGreaterThan(30)
    expect(standardErrorsApart({ count: 500_000, of: 1_000_000 }, 1e-9)).toBeGreaterThan(30)
    expect(standardErrorsApart({ count: 0, of: 1_000_000 }, 0.5)).toBeLessThan(-30)
  })
})

const spec = reducedSpec({ stability: 40, drive: 2, width: 5, trials: 4000, damping: 0.1 })

describe('write errors of a job without sampling', () => {
  it('are those of the axial equation, from either state', () => {
    for (const direction of ['parallelToAntiparallel', 'antiparallelToParallel'] as const) {
      const turned: JobSpec = { ...spec, write: { ...spec.write, direction } }
      const collinear = collinearProblem(turned)
      if (typeof collinear === 'string') throw new TypeError(collinear)
      // (Δ, i, τ) = (40, 2, 5): a spectral and a finite-volume solution that agree.
      expect(writeErrors(collinear, [spec.write.width], 'atPulseEnd')[0]! / 1.32848954e-3).toBeCloseTo(1, 5)
      expect(writeErrors(collinear, [spec.write.width], 'afterSettling')[0]! / 1.3331695e-3).toBeCloseTo(1, 5)
      expect(writeErrors(collinear, [spec.write.width], 'neverCrossed')[0]! / 1.31998479e-3).toBeCloseTo(1, 5)
    }
  })

  it('fall along the curve, on which the width for a target is read off', () => {
    const collinear = collinearProblem(spec)
    if (typeof collinear === 'string') throw new TypeError(collinear)
    const curve = writeErrorCurve(collinear, 'afterSettling', 100)
    for (let k = 1; k < curve.value.length; k++) expect(curve.value[k]!).toBeLessThanOrEqual(curve.value[k - 1]! * (1 + 1e-9))
    const width = widthForError(curve, 1e-6)!
    expect(writeErrors(collinear, [width], 'afterSettling')[0]! / 1e-6).toBeCloseTo(1, 2)
    expect(widthForError(curve, 1e-30)).toBeNull()
  })

  it('say what keeps them from being solved', () => {
    const tilted: JobSpec = { ...spec, device: { ...spec.device, referenceTilt: 0.1 } }
    expect(agreement(tilted, prepareProblem(tilted), { afterSettling: { count: 0, of: 10, value: 0, low: 0, high: 0.3 }, atPulseEnd: { count: 0, of: 10, value: 0, low: 0, high: 0.3 }, neverCrossed: { count: 0, of: 10, value: 0, low: 0, high: 0.3 } }))
      .toEqual({ kind: 'missing', reason: 'the reference layer is tilted' })
  })

  it('stand beside the count in a complete answer and in its words, and agree', () => {
    const chunk = openChunk(spec, 0, 4000)
    while (chunk.done < chunk.total) chunk.advance()
    const { answer } = mergeChunks(spec, [chunk.finish()])
    if (answer.kind !== 'switching' || answer.agreement?.kind !== 'solved') throw new TypeError('nothing was solved')
    for (const rule of ['afterSettling', 'atPulseEnd', 'neverCrossed'] as const) expect(Math.abs(answer.agreement[rule].apart)).toBeLessThan(4)
    expect(answer.words.detail).toContain('Without sampling (Fokker–Planck) 1.33 × 10⁻³ fail; the count agrees.')
  })
})
