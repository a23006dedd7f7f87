import { describe, expect, it } from 'vitest'
import { axialBarrier, axialEscapeRate, axialFirstPassage, axialLowestRate } from '#shared/numerics/escape'

/** Relative deviation. */
const off = (value: number, from: number) => Math.abs(value / from - 1)

// Brown, Phys. Rev. 130, 1677 (1963): the axial problem; its lowest eigenvalue by two unrelated numerical methods, 5e-15.
describe('the lowest rate of the axial problem, λ₁τ_D', () => {
  it.each([
    [1, 0, 0.653139834372077],
    [5, 0, 0.0677031648308333],
    [10, 0, 1.441083334692998e-3],
    [20, 0, 1.971656371895801e-7],
    [40, 0, 1.181805666469975e-15],
    [10, 0.1, 4.300262633946295e-3],
    [20, 0.3, 1.605298557957611e-3],
  ])('Δ = %d, h = %d', (stability, field, expected) => {
    expect(off(stability * axialLowestRate({ stability, field }), expected)).toBeLessThan(2e-12)
  })

  it('is the same for either direction of the field, and for a field or a drive that tilts alike', () => {
    const rate = axialLowestRate({ stability: 20, field: 0.3 })
    expect(off(axialLowestRate({ stability: 20, field: -0.3 }), rate)).toBeLessThan(1e-11)
    expect(off(axialLowestRate({ stability: 20, field: 0, drive: 0.3 }), rate)).toBeLessThan(1e-11)
  })

  it.each([[20, 0.5, 5.14455560966e-3], [40, 0.2, 2.01381210482e-11]])('below threshold, Δ = %d, i = %d, per unit of reduced time', (stability, drive, expected) => {
    expect(off(axialLowestRate({ stability, field: 0, drive }), expected)).toBeLessThan(1e-11)
  })

  it('approaches Brown’s asymptote as 1/Δ', () => {
    const asymptote = (stability: number) => 2 * Math.sqrt(stability / Math.PI) * Math.exp(-stability)
    const excess = (stability: number) => (asymptote(stability) / axialLowestRate({ stability, field: 0 }) - 1) * stability
    expect(excess(100)).toBeCloseTo(excess(400), 1)
    expect(off(excess(400), 1)).toBeLessThan(0.05)
  })
})

describe('escape from one well', () => {
  it('is half of λ₁ where both wells are alike', () => {
    expect(off(axialEscapeRate({ stability: 30, field: 0 })! * 2, axialLowestRate({ stability: 30, field: 0 }))).toBeLessThan(1e-13)
  })

  it('obeys detailed balance', () => {
    const [up, down] = [axialEscapeRate({ stability: 25, field: 0.1 })!, axialEscapeRate({ stability: 25, field: -0.1 })!]
    // Populations of the wells, each by its own quadrature: ∫ exp[Δ(z² + 2hz)] on either side of the top.
    const population = (from: number, to: number) => {
      let sum = 0
      const steps = 200_000
      for (let k = 0; k < steps; k++) {
        const z = from + (to - from) * (k + 0.5) / steps
        sum += Math.exp(25 * (z * z - 1 + 0.2 * z)) * (to - from) / steps
      }
      return sum
    }
    expect(off(down / up, population(-0.1, 1) / population(-1, -0.1))).toBeLessThan(1e-7)
    expect(off(up + down, axialLowestRate({ stability: 25, field: 0.1 }))).toBeLessThan(1e-12)
  })

  it('has the barrier Δ(1 + h − i)², and none beyond the threshold', () => {
    expect(axialBarrier({ stability: 60, field: 0.1, drive: 0.3 })!.height).toBeCloseTo(60 * 0.8 ** 2, 10)
    expect(axialBarrier({ stability: 60, field: 0, drive: 1.01 })).toBeNull()
    expect(axialEscapeRate({ stability: 60, field: 0, drive: 1.01 })).toBeNull()
  })
})

// The first-passage rows come with the eigenvalues: a spectral and a finite-volume solution that agree.
describe('first passage to m_z = 0', () => {
  it.each([[40, 2, 2.0346916235, 0.3813192615], [60, 3, 1.27560304, 0.1021578518]])('Δ = %d, i = %d', (stability, drive, mean, variance) => {
    const found = axialFirstPassage({ stability, field: 0, drive })
    expect(off(found.mean, mean)).toBeLessThan(1e-9)
    expect(off(found.variance, variance)).toBeLessThan(1e-9)
  })
})

// Read disturb, long reads: Δ = 60, i = 0.3, μ0H_k = 0.3 T, α = 0.01, 10 ns (worked by the same two methods).
it('gives the limit of long reads', () => {
  const perSecond = 1.76085962784e11 * 0.01 * 0.3 / (1 + 0.01 ** 2)
  const rate = axialLowestRate({ stability: 60, field: 0, drive: 0.3 })
  expect(off(rate * perSecond * 10e-9, 2.4303177e-12)).toBeLessThan(1e-7)
})
