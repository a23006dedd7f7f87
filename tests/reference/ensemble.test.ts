import { describe, expect, it } from 'vitest'
import { LEVELS, levelMean, levelMiddle, levelOf, levelQuantile } from '#shared/numerics/levels'
import { mergeChunks, openChunk } from '#shared/physics/engine'
import { mergeEnsembles } from '#shared/physics/ensemble'
import { prepareProblem } from '#shared/physics/problem'
import type { SwitchingAnswer } from '#shared/schemas/answer'
import type { JobSpec, JobSpecInput } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { reducedSpec, WORKED_SET } from '../support/specs'

function answerOf(spec: JobSpec): SwitchingAnswer {
  const trials = spec.question.kind === 'switching' ? spec.question.trials : 0
  const chunk = openChunk(spec, 0, trials)
  while (chunk.done < chunk.total) chunk.advance()
  const { answer } = mergeChunks(spec, [chunk.finish()])
  if (answer.kind !== 'switching') throw new TypeError('not a switching answer')
  return answer
}
const relative = (value: number, expected: number) => Math.abs(value / expected - 1)

describe('levels', () => {
  it('hold every number of (−1, 1) and give back quantiles and means', () => {
    const counts = new Uint32Array(LEVELS)
    for (let k = 0; k < 10_000; k++) counts[levelOf(-1 + 2 * (k + 0.5) / 10_000)]! += 1
    for (const share of [0.05, 0.5, 0.95]) expect(levelQuantile(counts, 0, share)).toBeCloseTo(2 * share - 1, 3)
    expect(levelMean(counts, 0, z => z * z)).toBeCloseTo(1 / 3, 4)
    expect(levelOf(-1)).toBe(0)
    expect(levelOf(1)).toBe(LEVELS - 1)
    expect(levelOf(levelMiddle(17))).toBe(17)
  })

  it('of trials and counts of them are the same together, whatever the cut', () => {
    const levels = Uint8Array.from({ length: 60 }, (_, k) => (k * 37) % LEVELS)
    const counts = new Uint32Array(3 * LEVELS)
    for (let n = 0; n < 30; n++) counts[(n % 3) * LEVELS + levels[n]!]! += 1
    const energy = (n: number) => new Float32Array(n)
    const one = mergeEnsembles([{ alongLevels: levels, energy: energy(20) }], 20, 3)
    const two = mergeEnsembles([{ alongCounts: counts, energy: energy(10) }, { alongLevels: levels.subarray(30), energy: energy(10) }], 20, 3)
    expect(two.along).toEqual(one.along)
  })
})

describe('all trials over time', () => {
  it('start as the well: ⟨m·e⟩ = 1 − 1/(2Δ) to first order, at R_P, and stay there without a drive that matters', () => {
    const spec = jobSpecSchema.parse({
      ...WORKED_SET, question: { kind: 'switching', trials: 400 }, device: { ...WORKED_SET.device, damping: 0.1 },
      write: { direction: 'parallelToAntiparallel', drive: { kind: 'current', current: 1e-6 }, width: 2e-9, edge: 0.4e-9 },
    } satisfies JobSpecInput)
    const { ensemble, energy } = answerOf(spec)
    const { numbers } = prepareProblem(spec)
    expect(ensemble!.time[0]).toBeCloseTo(-0.2e-9, 14)
    expect(ensemble!.time[ensemble!.time.length - 1]).toBeCloseTo(2.2e-9, 14)
    for (const m of [ensemble!.moment.mean[0]!, ensemble!.moment.mean[50]!]) expect(Math.abs(m - (1 - 0.5 / numbers.stability))).toBeLessThan(3e-3)
    const resistance = 1 / numbers.parallelResistance
    for (const r of ensemble!.resistance.mean) expect(relative(r, 1 / resistance)).toBeLessThan(0.01)
    // I² R (t_p − t_e/3)
    expect(relative(energy!.value, 1e-12 * numbers.parallelResistance * (2e-9 - 0.4e-9 / 3))).toBeLessThan(0.01)
  })

  it('take the energy ∫ V² ⟨G⟩ dt under a voltage: the conductance is linear in ⟨cos θ⟩', () => {
    const spec = jobSpecSchema.parse({
      ...WORKED_SET, question: { kind: 'switching', trials: 300 }, device: { ...WORKED_SET.device, damping: 0.05, referenceTilt: 0.2 },
      write: { direction: 'antiparallelToParallel', drive: { kind: 'voltage', voltage: 1.2 }, width: 3e-9 },
    } satisfies JobSpecInput)
    const { ensemble, energy } = answerOf(spec)
    const { parallelResistance, antiparallelResistance } = prepareProblem(spec).numbers
    const { time, resistance } = ensemble!
    // ⟨G⟩ between the means of 1/R of median and mean: close where all do the same.
    let sum = 0
    for (let k = 1; k < time.length; k++) sum += (time[k]! - time[k - 1]!) * 1.44 * (1 / resistance.mean[k]! + 1 / resistance.mean[k - 1]!) / 2
    expect(relative(energy!.value, sum)).toBeLessThan(0.08)
    expect(energy!.value).toBeGreaterThan(1.44 * 3e-9 / antiparallelResistance)
    expect(energy!.value).toBeLessThan(1.44 * 3e-9 / parallelResistance)
    expect(resistance.mean[0]! / antiparallelResistance).toBeGreaterThan(0.9)
    expect(resistance.mean[time.length - 1]! / parallelResistance).toBeLessThan(1.1)
  })

  it('have a median that crosses zero when half of the trials have crossed', () => {
    const spec = reducedSpec({ stability: 40, drive: 2, width: 5, damping: 0.2, trials: 800, seed: 9 })
    const { ensemble, time } = answerOf(spec)
    const half = time.percentiles.find(p => p.share === 0.5)!.value!
    const k = ensemble!.moment.median.findIndex(m => m < 0)
    const [before, after] = [ensemble!.moment.median[k - 1]!, ensemble!.moment.median[k]!]
    const crossing = ensemble!.time[k - 1]! + before / (before - after) * (ensemble!.time[k]! - ensemble!.time[k - 1]!)
    // A first passage comes before the last one.
    expect(crossing / half).toBeGreaterThan(0.99)
    expect(crossing / half).toBeLessThan(1.08)
  })
})
