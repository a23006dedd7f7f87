import { describe, expect, it } from 'vitest'
import { findWell, wellSampler } from '#shared/numerics/boltzmann'
import type { Landscape } from '#shared/numerics/boltzmann'
import { Rk4Stepper } from '#shared/numerics/macrospin'
import { STREAM, UniformStream } from '#shared/numerics/philox'
import { quiet } from '../support/dynamics'

/** Mean of f over a long run, with its standard error from blocks much longer than the memory of the moment. */
function timeAverage(stepper: Rk4Stepper, step: number, steps: number, f: (m: Float64Array) => number): { mean: number, error: number } {
  const blocks = 50
  const means: number[] = []
  for (let b = 0; b < blocks; b++) {
    let sum = 0
    for (let k = 0; k < steps / blocks; k++) {
      stepper.drawNoise(step)
      stepper.step(step, 1, 1, 1)
      sum += f(stepper.m)
    }
    means.push(sum / (steps / blocks))
  }
  const mean = means.reduce((a, b) => a + b) / blocks
  return { mean, error: Math.sqrt(means.reduce((sum, m) => sum + (m - mean) ** 2, 0) / (blocks * (blocks - 1))) }
}

describe('Boltzmann equilibrium by integration: noise strength and Stratonovich reading (Brown 1963)', () => {
  it('uniaxial, Δ = 4, α = 0.5: ⟨z²⟩ = 0.70463; a wrong factor 2 or (1 + α²) in the noise fails', () => {
    const damping = 0.5
    const stability = 4
    const stepper = new Rk4Stepper(quiet({ damping, noise: damping / (stability * (1 + damping * damping)) }), [7, 8])
    stepper.restart(0)
    stepper.m.set([0, 0, 1])
    const { mean, error } = timeAverage(stepper, 0.1, 600_000, m => m[2]! ** 2)
    expect(error).toBeLessThan(0.004)
    expect(Math.abs(mean - 0.70463) / error).toBeLessThan(3)
  })

  it('in a field alone, ξ = 2: ⟨z⟩ = coth ξ − 1/ξ = 0.537314720728 (Langevin)', () => {
    // Field scale H: ξ = μ0 Ms V H/(kB T) = 2 Δ_s.
    const damping = 0.3
    const stability = 1
    const stepper = new Rk4Stepper(quiet({ damping, diagonal: [0, 0, 0], field: [0, 0, 1], noise: damping / (stability * (1 + damping * damping)) }), [3, 4])
    stepper.restart(1)
    stepper.m.set([0, 0, 1])
    const { mean, error } = timeAverage(stepper, 0.1, 600_000, m => m[2]!)
    expect(error).toBeLessThan(0.01)
    expect(Math.abs(mean - 0.537314720728) / error).toBeLessThan(3)
  })
})

describe('the start is drawn from the zero-drive well exactly', () => {
  /** Mean of f over the well's Boltzmann distribution by midpoint quadrature on the sphere. */
  function expected(landscape: Landscape, side: 1 | -1, f: (m: number[]) => number): number {
    let weight = 0
    let sum = 0
    for (let a = 0; a < 600; a++) {
      const z = side * (a + 0.5) / 600
      for (let b = 0; b < 120; b++) {
        const phi = (b + 0.5) / 120 * 2 * Math.PI
        const r = Math.sqrt(1 - z * z)
        const m = [r * Math.cos(phi), r * Math.sin(phi), z]
        const exponent = landscape.stability * m.reduce((s, c, axis) => s + landscape.diagonal[axis]! * c * c + 2 * landscape.field[axis]! * c, 0)
        const w = Math.exp(exponent - landscape.stability * (1 + 2 * Math.abs(landscape.field[2])))
        weight += w
        sum += w * f(m)
      }
    }
    return sum / weight
  }

  it.each([
    ['axial', { stability: 20, diagonal: [0, 0, 1], field: [0, 0, 0] }, 1],
    ['axial, held by a field', { stability: 40, diagonal: [0, 0, 1], field: [0, 0, 0.2] }, 1],
    ['axial, against a field, from below', { stability: 15, diagonal: [0, 0, 1], field: [0, 0, 0.3] }, -1],
    ['transverse field', { stability: 25, diagonal: [0, 0, 1], field: [0.2, 0.1, -0.05] }, 1],
    ['biaxial with a field', { stability: 12, diagonal: [0.2, -0.3, 1], field: [0.1, 0, 0.1] }, -1],
  ] as [string, Landscape, 1 | -1][])('%s', (_name, landscape, side) => {
    const draw = wellSampler(landscape, findWell(landscape, side)!)
    const uniforms = new UniformStream([5, 6], STREAM.start)
    const m = new Float64Array(3)
    const n = 20_000
    const functions: ((m: ArrayLike<number>) => number)[] = [v => v[2]! ** 2, v => v[0]!, v => v[1]!, v => v[0]! ** 2 - v[1]! ** 2, v => side * v[2]!]
    const sums = functions.map(() => ({ first: 0, second: 0 }))
    for (let k = 0; k < n; k++) {
      uniforms.restart(k)
      draw(uniforms, m)
      expect(side * m[2]!).toBeGreaterThanOrEqual(0)
      functions.forEach((f, index) => {
        const value = f(m)
        sums[index]!.first += value
        sums[index]!.second += value * value
      })
    }
    functions.forEach((f, index) => {
      const mean = sums[index]!.first / n
      const error = Math.sqrt((sums[index]!.second / n - mean * mean) / n)
      expect(Math.abs(mean - expected(landscape, side, f)) / error).toBeLessThan(3.5)
    })
  })

  it('matches ⟨z²⟩ = [√Δ/F(√Δ) − 1]/(2Δ), F Dawson’s function: Δ = 20: 0.948554770091', () => {
    const draw = wellSampler({ stability: 20, diagonal: [0, 0, 1], field: [0, 0, 0] }, [0, 0, 1])
    const uniforms = new UniformStream([15, 16], STREAM.start)
    const m = new Float64Array(3)
    const n = 100_000
    let first = 0
    let second = 0
    for (let k = 0; k < n; k++) {
      uniforms.restart(k)
      draw(uniforms, m)
      first += m[2]! ** 2
      second += m[2]! ** 4
    }
    const mean = first / n
    expect(Math.abs(mean - 0.948554770091) / Math.sqrt((second / n - mean * mean) / n)).toBeLessThan(3)
  })
})
