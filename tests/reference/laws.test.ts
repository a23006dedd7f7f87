import { describe, expect, it } from 'vitest'
import { driftOf, Rk4Stepper } from '#shared/numerics/macrospin'
import type { Dynamics } from '#shared/numerics/macrospin'
import { prepareProblem } from '#shared/physics/problem'
import { jobSpecSchema } from '#shared/schemas/job'
import { fromUnit, toUnit } from '#shared/utils/quantity'
import { quiet } from '../support/dynamics'
import { WORKED_SET } from '../support/specs'

type Triple = [number, number, number]
const FULL: Partial<Dynamics> = { damping: 0.1, diagonal: [0.1, -0.6, 1], field: [0.1, 0.05, 0.2], torque: { q0: -0.12, q1: 1, q2: 0.36 }, fieldLikeRatio: 0.2, reference: [0.6, 0, 0.8] }

function go(dynamics: Dynamics, m0: Triple, steps: number, h: number, noise: Triple = [0, 0, 0]): Triple {
  const stepper = new Rk4Stepper(dynamics, [0, 0])
  stepper.m.set(m0)
  stepper.holdNoise(...noise)
  for (let k = 0; k < steps; k++) stepper.step(h, 1, 1, 1)
  return [...stepper.m] as Triple
}
const apart = (a: readonly number[], b: readonly number[]) => Math.hypot(...a.map((c, k) => c - b[k]!))

/** Nodes and weights of Gauss–Hermite quadrature for a standard normal number, seven points (Abramowitz & Stegun, table 25.10). */
const NORMAL: [number, number][] = [[0, 0.810264617556807], [0.816287882858965, 0.425607252610128], [1.673551628767471, 0.0545155828191270], [2.651961356835233, 0.000971781245099519]]
  .flatMap(([x, w]) => (x === 0 ? [[0, w! / Math.sqrt(Math.PI)]] : [[x! * Math.SQRT2, w! / Math.sqrt(Math.PI)], [-x! * Math.SQRT2, w! / Math.sqrt(Math.PI)]]) as [number, number][])

describe('weak order', () => {
  /** ⟨m_z⟩ after one step from +z without a field, over all thermal fields that the step may hold. */
  function meanAfterStep(damping: number, noise: number, h: number): number {
    let mean = 0
    for (const [x, wx] of NORMAL) {
      for (const [y, wy] of NORMAL) {
        for (const [z, wz] of NORMAL) {
          const scale = Math.sqrt(noise / h)
          mean += wx * wy * wz * go(quiet({ damping, diagonal: [0, 0, 0] }), [0, 0, 1], 1, h, [scale * x, scale * y, scale * z])[2]
        }
      }
    }
    return mean
  }

  it.each([0, 0.1, 0.5])('is one: free diffusion decays as exp[−noise (1 + α²) s] (Brown 1963), α = %d', (damping) => {
    const error = (h: number) => Math.abs(meanAfterStep(damping, 0.1, h) - Math.exp(-0.1 * (1 + damping ** 2) * h))
    // The error of one step is of second order, so that of a given time is of first.
    expect(Math.log2(error(0.05) / error(0.025))).toBeGreaterThan(1.85)
    expect(Math.log2(error(0.05) / error(0.025))).toBeLessThan(2.15)
    expect(error(0.35) / 0.35).toBeLessThan(1e-3)
  })
})

describe('without damping', () => {
  it('time runs back to where it came from', () => {
    const dynamics = quiet({ ...FULL, damping: 0, torque: { q0: 0, q1: 1, q2: 0 } })
    const there = go(dynamics, [0.6, 0, 0.8], 310, 0.05)
    expect(apart(there, [0.6, 0, 0.8])).toBeGreaterThan(0.1)
    expect(apart(go(dynamics, there, 310, -0.05), [0.6, 0, 0.8])).toBeLessThan(1e-6)
  })

  it('energy stays', () => {
    const dynamics = quiet({ ...FULL, damping: 0, torque: { q0: 0, q1: 1, q2: 0 } })
    const energy = (m: Triple) => m.reduce((sum, c, k) => sum - dynamics.diagonal[k]! * c * c - 2 * dynamics.field[k]! * c, 0)
    expect(energy(go(dynamics, [0.6, 0, 0.8], 2000, 0.05))).toBeCloseTo(energy([0.6, 0, 0.8]), 5)
  })
})

describe('turning the whole problem turns the answer', () => {
  it('about z by any angle where the cell is axial', () => {
    const turn = (angle: number) => ([x, y, z]: Triple): Triple => [Math.cos(angle) * x - Math.sin(angle) * y, Math.sin(angle) * x + Math.cos(angle) * y, z]
    const axial = quiet({ ...FULL, diagonal: [0, 0, 1] })
    const turned = turn(1.1)
    const other = { ...axial, field: turned([...axial.field] as Triple), reference: turned([...axial.reference] as Triple) }
    const noise: Triple = [0.2, -0.1, 0.15]
    expect(apart(go(other, turned([0.6, 0, 0.8]), 300, 0.1, turned(noise)), turned(go(axial, [0.6, 0, 0.8], 300, 0.1, noise)))).toBeLessThan(1e-12)
  })

  it('by a third of a turn about (1, 1, 1) for any cell: the frame of an in-plane one', () => {
    const turned = ([x, y, z]: readonly number[]): Triple => [y!, z!, x!]
    const one = quiet(FULL)
    const other = { ...one, diagonal: turned(one.diagonal), field: turned(one.field), reference: turned(one.reference) }
    const noise: Triple = [0.2, -0.1, 0.15]
    expect(apart(go(other, turned([0.6, 0, 0.8]), 300, 0.1, turned(noise)), turned(go(one, [0.6, 0, 0.8], 300, 0.1, noise)))).toBeLessThan(1e-12)
  })
})

describe('units', () => {
  it('of any kind give the same reduced problem', () => {
    const spec = jobSpecSchema.parse(WORKED_SET)
    const field = (unit: string, value: number) => fromUnit(toUnit(value, 'field', unit), 'field', unit)
    const { numbers, dynamics } = prepareProblem(spec)
    for (const unit of ['mT', 'T', 'Oe', 'kOe', 'kA/m']) {
      const other = prepareProblem({ ...spec, device: { ...spec.device, anisotropy: { kind: 'effectiveField', anisotropyField: field(unit, WORKED_SET.device.anisotropy.anisotropyField) } } })
      expect(other.numbers.stability).toBeCloseTo(numbers.stability, 9)
    }
    const byDensity = prepareProblem({ ...spec, write: { ...spec.write, drive: { kind: 'currentDensity', currentDensity: 60e-6 / numbers.area } } })
    expect(byDensity.dynamics.torque.q0).toBeCloseTo(dynamics.torque.q0, 14)
    const meanConductance = (1 / numbers.parallelResistance + 1 / numbers.antiparallelResistance) / 2
    const byVoltage = prepareProblem({ ...spec, write: { ...spec.write, drive: { kind: 'voltage', voltage: 60e-6 / meanConductance } } })
    expect(byVoltage.dynamics.torque.q0).toBeCloseTo(dynamics.torque.q0, 12)
  })

  it('of field and time scale out: all fields k times larger, everything k times faster', () => {
    const at = (k: number) => {
      const out = [0, 0, 0]
      driftOf(quiet({ ...FULL, diagonal: [0.1 * k, -0.6 * k, k], field: [0.1 * k, 0.05 * k, 0.2 * k], torque: { q0: -0.12 * k, q1: 1, q2: 0.36 } }))([0.6, 0, 0.8], 1, out)
      return out.map(c => c / k)
    }
    expect(apart(at(1), at(7))).toBeLessThan(1e-14)
  })
})

describe('Boltzmann equilibrium by integration', () => {
  /** Mean of f over a long run with its standard error from blocks. */
  function average(dynamics: Dynamics, f: (m: Float64Array) => number, steps: number, seed: number): { mean: number, error: number } {
    const stepper = new Rk4Stepper(dynamics, [seed, 8])
    // The bias of a step is of first order in noise times step.
    const h = Math.min(0.1, 0.03 / dynamics.damping)
    stepper.restart(0)
    stepper.m.set([0, 0, 1])
    const means: number[] = []
    for (let block = 0; block < 40; block++) {
      let sum = 0
      for (let k = 0; k < steps / 40; k++) {
        stepper.drawNoise(h)
        stepper.step(h, 1, 1, 1)
        sum += f(stepper.m)
      }
      means.push(sum / (steps / 40))
    }
    const mean = means.reduce((a, b) => a + b) / 40
    return { mean, error: Math.sqrt(means.reduce((sum, m) => sum + (m - mean) ** 2, 0) / (40 * 39)) }
  }
  function expected(stability: number, diagonal: Triple, field: Triple, f: (m: Float64Array) => number): number {
    let [weight, sum] = [0, 0]
    for (let a = 0; a < 400; a++) {
      for (let b = 0; b < 96; b++) {
        const z = -1 + 2 * (a + 0.5) / 400
        const phi = 2 * Math.PI * (b + 0.5) / 96
        const m = Float64Array.of(Math.sqrt(1 - z * z) * Math.cos(phi), Math.sqrt(1 - z * z) * Math.sin(phi), z)
        const w = Math.exp(stability * (diagonal.reduce((s, d, k) => s + d * m[k]! ** 2 + 2 * field[k]! * m[k]!, 0) - 2))
        weight += w
        sum += w * f(m)
      }
    }
    return sum / weight
  }
  const CASES: [string, Triple, Triple, (m: Float64Array) => number][] = [
    ['uniaxial, ⟨z²⟩', [0, 0, 1], [0, 0, 0], m => m[2]! ** 2],
    ['a tilted field, ⟨x + z⟩', [0, 0, 0], [0.3, 0, 0.5], m => m[0]! + m[2]!],
    ['biaxial, ⟨x² − y²⟩', [0.4, -1, 0.8], [0, 0, 0], m => m[0]! ** 2 - m[1]! ** 2],
  ]
  it.each(CASES.flatMap(([name, diagonal, field, f]) => [0.1, 0.3, 1].map(damping => [name, damping, diagonal, field, f] as const)))('%s, α = %d', (_name, damping, diagonal, field, f) => {
    const stability = 2
    const { mean, error } = average(quiet({ damping, diagonal, field, noise: damping / (stability * (1 + damping ** 2)) }), f, 120_000, Math.round(100 * damping))
    expect(error).toBeLessThan(0.03)
    expect(Math.abs(mean - expected(stability, diagonal, field, f)) / error).toBeLessThan(3.4)
  })

  it('gives half of kB T to each direction across the easy axis: ⟨m_X²⟩ = 1/(2Δ H_1), ⟨m_Y²⟩ = 1/(2Δ H_2)', () => {
    const [stability, damping] = [150, 0.3]
    const dynamics = quiet({ damping, diagonal: [0, -4, 1], noise: damping / (stability * (1 + damping ** 2)) })
    const soft = average(dynamics, m => 2 * stability * m[0]! ** 2, 160_000, 5)
    const stiff = average(dynamics, m => 10 * stability * m[1]! ** 2, 160_000, 6)
    expect(soft.error).toBeLessThan(0.03)
    expect(Math.abs(soft.mean - 1)).toBeLessThan(3.4 * soft.error + 0.01)
    expect(Math.abs(stiff.mean - 1)).toBeLessThan(3.4 * stiff.error + 0.01)
  })
})
