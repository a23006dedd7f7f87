import { describe, expect, it } from 'vitest'
import { mergeChunks, openChunk } from '#shared/physics/engine'
import { prepareProblem } from '#shared/physics/problem'
import type { SwitchingAnswer } from '#shared/schemas/answer'
import type { JobSpec } from '#shared/schemas/job'
import { reducedSpec } from '../support/specs'

function answerOf(spec: JobSpec): SwitchingAnswer {
  const trials = spec.question.kind === 'switching' ? spec.question.trials : 0
  const chunk = openChunk(spec, 0, trials)
  while (chunk.done < chunk.total) chunk.advance()
  const { answer } = mergeChunks(spec, [chunk.finish()])
  if (answer.kind !== 'switching') throw new TypeError('not a switching answer')
  return answer
}

/** Distance from the exact share in standard errors of that share. */
const sigmas = (share: { value: number, of: number }, exact: number) => Math.abs(share.value - exact) / Math.sqrt(exact * (1 - exact) / share.of)

/**
 * Exact values by independent spectral and finite-volume solutions of the axial Fokker–Planck equation (reference list);
 * a reduced-time answer does not depend on α, and a large one costs least.
 */
describe('write errors of the solver against Fokker–Planck', () => {
  it('Δ = 40, i = 1, τ = 10: 0.289333808 at pulse end, 0.289010133 after settling, 0.288497136 never crossed', () => {
    const { failures } = answerOf(reducedSpec({ stability: 40, drive: 1, width: 10, trials: 20_000, damping: 0.2, seed: 11, step: { kind: 'automatic', biasAllowed: 0.003 } }))
    expect(sigmas(failures.atPulseEnd, 0.289333808)).toBeLessThan(3)
    expect(sigmas(failures.afterSettling, 0.289010133)).toBeLessThan(3)
    expect(sigmas(failures.neverCrossed, 0.288497136)).toBeLessThan(3)
  })

  it('Δ = 20, i = 2, τ = 3: the three rules keep their order and their values', () => {
    const { failures } = answerOf(reducedSpec({ stability: 20, drive: 2, width: 3, trials: 40_000, damping: 0.2, seed: 5, step: { kind: 'automatic', biasAllowed: 0.003 } }))
    expect(sigmas(failures.atPulseEnd, 3.63159782e-2)).toBeLessThan(3)
    expect(sigmas(failures.afterSettling, 3.65879369e-2)).toBeLessThan(3)
    expect(sigmas(failures.neverCrossed, 3.58461798e-2)).toBeLessThan(3)
    expect(failures.neverCrossed.count).toBeLessThanOrEqual(failures.atPulseEnd.count)
  })

  it('Δ = 40, i = 2, τ = 5 in a field h = +0.2 that holds the start', () => {
    const { failures } = answerOf(reducedSpec({ stability: 40, drive: 2, width: 5, field: 0.2, trials: 30_000, damping: 0.3, seed: 3, step: { kind: 'automatic', biasAllowed: 0.003 } }))
    expect(sigmas(failures.atPulseEnd, 7.96350697e-3)).toBeLessThan(3)
    expect(sigmas(failures.afterSettling, 9.57195774e-3)).toBeLessThan(3)
    expect(sigmas(failures.neverCrossed, 7.91278122e-3)).toBeLessThan(3)
  })
})

describe('first passage to the equator', () => {
  it('Δ = 40, i = 2: mean 2.0346916235, variance 0.3813192615 in reduced time', () => {
    const spec = reducedSpec({ stability: 40, drive: 2, width: 14, trials: 20_000, damping: 0.2, seed: 29 })
    const { tauRate } = prepareProblem(spec)
    const { time } = answerOf(spec)
    expect(time.crossed).toBe(20_000)
    const mean = time.mean!.value * tauRate
    expect(Math.abs(mean - 2.0346916235) / (time.mean!.standardError * tauRate)).toBeLessThan(3)
    const spread = time.spread!.value * tauRate
    expect(Math.abs(spread - Math.sqrt(0.3813192615)) / (time.spread!.standardError * tauRate)).toBeLessThan(3)
  })
})
