import { describe, expect, it } from 'vitest'
import { axialWriteErrors } from '#shared/numerics/axial'
import type { AxialRule } from '#shared/numerics/axial'
import { mergeChunks, openChunk } from '#shared/physics/engine'
import { criticalDensity } from '#shared/physics/derived'
import { nearSide, prepareProblem, torqueForm } from '#shared/physics/problem'
import type { JobSpec, JobSpecInput } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { reducedSpec } from '../support/specs'

const RULES: AxialRule[] = ['atPulseEnd', 'afterSettling', 'neverCrossed']

/** Write errors of a collinear job by the two estimators: shares of trials, and Fokker–Planck. */
function bothWays(spec: JobSpec) {
  const trials = spec.question.kind === 'switching' ? spec.question.trials : 0
  const chunk = openChunk(spec, 0, trials)
  while (chunk.done < chunk.total) chunk.advance()
  const { answer } = mergeChunks(spec, [chunk.finish()])
  if (answer.kind !== 'switching') throw new TypeError('not a switching answer')
  const problem = prepareProblem(spec)
  const side = nearSide(spec)
  const { q1, q2 } = torqueForm(spec.device.torque)
  const device = {
    stability: problem.numbers.stability, field: side * problem.dynamics.field[2], torque: { q1, q2: side * q2 },
    fieldLike: spec.device.damping * spec.device.fieldLikeRatio,
  }
  const width = problem.tauRate * spec.write.width
  return RULES.map((rule) => {
    const exact = axialWriteErrors(device, { drive: problem.reducedDrive, edge: problem.tauRate * spec.write.edge }, [width], rule)[0]!
    const share = answer.failures[rule]
    return { rule, exact, value: share.value, sigmas: Math.abs(share.value - exact) / Math.sqrt(exact * (1 - exact) / share.of) }
  })
}

/** The worked set at Δ = 30 with α = 0.2, changed, with the drive set to a reduced drive and the width and edge to reduced times. */
function job(changes: { device?: Partial<JobSpecInput['device']>, direction?: JobSpec['write']['direction'], field?: number }, drive: number, width: number, edge: number): JobSpec {
  const base = reducedSpec({ stability: 30, drive: 1, width: 1, field: changes.field ?? 0, damping: 0.2, trials: 20_000, seed: 77, step: { kind: 'automatic', biasAllowed: 0.002 } })
  const direction = changes.direction ?? 'parallelToAntiparallel'
  const device = { ...base.device, ...changes.device }
  const draft = jobSpecSchema.parse({ ...base, device, write: { ...base.write, direction } })
  const problem = prepareProblem(draft)
  const currentDensity = drive * criticalDensity(draft, problem.numbers.anisotropyField, nearSide(draft))
  return jobSpecSchema.parse({ ...draft, write: { direction, drive: { kind: 'currentDensity', currentDensity }, width: width / problem.tauRate, edge: edge / problem.tauRate } })
}

describe('trials and Fokker–Planck, two independent ways to the same share', () => {
  it.each([
    ['edges as long as half the pulse', job({}, 2, 3, 1.5)],
    ['a symmetric junction, from parallel', job({ device: { torque: { kind: 'symmetric', polarization: 0.7 } } }, 1.5, 3, 0.4)],
    ['a symmetric junction, from antiparallel', job({ device: { torque: { kind: 'symmetric', polarization: 0.7 } }, direction: 'antiparallelToParallel' }, 2.5, 3, 0.4)],
    ['an asymmetric junction, Λ = 1.6', job({ device: { torque: { kind: 'asymmetric', polarization: 0.6, asymmetry: 1.6 } } }, 2, 2.5, 0.2)],
    ['field-like torque, β = 0.5', job({ device: { fieldLikeRatio: 0.5 } }, 1.8, 3, 0.3)],
    ['a field that helps the start, from antiparallel', job({ direction: 'antiparallelToParallel', field: -0.15 }, 2, 3, 0)],
    ['a drive below the critical one in a field against the start', job({ field: -0.3 }, 0.8, 6, 0.5)],
  ])('%s', (_name, spec) => {
    for (const { sigmas, exact } of bothWays(spec)) {
      expect(exact).toBeGreaterThan(0.001)
      expect(exact).toBeLessThan(0.9)
      expect(sigmas).toBeLessThan(3.2)
    }
  })
})
