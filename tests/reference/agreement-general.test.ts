import { describe, expect, it } from 'vitest'
import { sphericalWriteErrors } from '#shared/numerics/spherical'
import { VACUUM_PERMEABILITY } from '#shared/physics/constants'
import { mergeChunks, openChunk } from '#shared/physics/engine'
import { deviceNumbers } from '#shared/physics/device'
import { prepareProblem } from '#shared/physics/problem'
import { criticalDensity } from '#shared/physics/derived'
import type { JobSpec, JobSpecInput } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { WORKED_SET } from '../support/specs'

/** A job at a reduced drive i and width τ, from parallel. */
function job(device: object, environment: object, drive: number, width: number): JobSpec {
  const base = {
    ...WORKED_SET, question: { kind: 'switching', trials: 10_000, failureRule: 'atPulseEnd' }, device: { ...WORKED_SET.device, ...device },
    environment: { temperature: 300, ...environment }, numerics: { seed: 11, step: { kind: 'automatic', biasAllowed: 0.002 } },
  } as JobSpecInput
  const draft = jobSpecSchema.parse(base)
  const { criticalField, tauRate } = prepareProblem(draft)
  const write = { direction: 'parallelToAntiparallel', drive: { kind: 'currentDensity', currentDensity: drive * criticalDensity(draft, criticalField, 1) }, width: width / tauRate } as const
  return jobSpecSchema.parse({ ...base, write })
}

/** Shares of trials and the solution on the sphere, for a write from parallel under a torque of constant efficiency. */
function bothWays(spec: JobSpec, degree: number, order: number) {
  const chunk = openChunk(spec, 0, 10_000)
  while (chunk.done < chunk.total) chunk.advance()
  const { answer } = mergeChunks(spec, [chunk.finish()])
  if (answer.kind !== 'switching') throw new TypeError('not a switching answer')
  const { dynamics, landscape, rate } = prepareProblem(spec)
  const device = {
    damping: dynamics.damping, stability: landscape.stability, curvature: landscape.diagonal, field: landscape.field, fieldLike: dynamics.fieldLikeRatio,
    polarizer: dynamics.reference.map(c => -c) as [number, number, number],
  }
  const pulse = { drive: -dynamics.torque.q0 / dynamics.damping }
  const width = dynamics.damping * rate * spec.write.width
  const solve = (l: number, m: number) => sphericalWriteErrors(device, pulse, [width], 'atPulseEnd', { degree: l, order: m, step: 2 })[0]!
  const exact = solve(degree, order)
  return { exact, truncation: Math.abs(solve(degree - 6, order - 4) / exact - 1), sigmas: Math.abs(answer.failures.atPulseEnd.value - exact) / Math.sqrt(exact * (1 - exact) / 10_000) }
}

describe('trials and the Fokker–Planck equation on the sphere, for cells that are not axial', () => {
  it('agree on an ellipse whose easy axis lies in the film, with a stray field along it', () => {
    const cell = { anisotropy: { kind: 'inPlane', interfaceAnisotropy: 0 }, saturationMagnetization: 4e5, diameter: 100e-9, secondDiameter: 40e-9, thickness: 2e-9, damping: 0.3 }
    const bare = deviceNumbers(jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, ...cell } }))
    // Interface anisotropy leaves an out-of-plane field of 1.5 H_k: within the reach of the solution on the sphere.
    const interfaceAnisotropy = (-bare.diagonal[1] - 1.5 * bare.anisotropyField) * VACUUM_PERMEABILITY * 4e5 * 2e-9 / 2
    const spec = job({ ...cell, anisotropy: { kind: 'inPlane', interfaceAnisotropy }, strayField: { x: 0.05 * bare.anisotropyField } }, {}, 1.8, 2.5)
    expect(prepareProblem(spec).landscape.diagonal[1]).toBeCloseTo(-1.5, 6)
    const { exact, truncation, sigmas } = bothWays(spec, 32, 18)
    expect(exact).toBeGreaterThan(0.01)
    expect(truncation).toBeLessThan(0.02)
    expect(sigmas).toBeLessThan(3.3)
  })

  it('agree on a perpendicular ellipse with a tilted reference, field-like torque and a field across', () => {
    const cell = { anisotropy: { kind: 'effectiveField', anisotropyField: 0.1 / VACUUM_PERMEABILITY }, saturationMagnetization: 7e5, diameter: 40e-9, secondDiameter: 25e-9, damping: 0.2, referenceTilt: 0.15, fieldLikeRatio: 0.3 }
    const spec = job(cell, { appliedField: { x: 0, y: 2500, z: 0 } }, 1.8, 2.5)
    expect(prepareProblem(spec).numbers.stability).toBeGreaterThan(7)
    const { exact, truncation, sigmas } = bothWays(spec, 26, 10)
    expect(exact).toBeGreaterThan(0.01)
    expect(truncation).toBeLessThan(0.02)
    expect(sigmas).toBeLessThan(3.3)
  })
})
