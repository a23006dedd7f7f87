import { describe, expect, it } from 'vitest'
import type { Sparse } from '#shared/numerics/harmonics'
import { ACTIONS, HarmonicBasis, harmonicMoments, matrixOf, product, sum } from '#shared/numerics/harmonics'
import { gaussLegendre } from '#shared/numerics/quadrature'

const basis = new HarmonicBasis(6, 6)
const matrix = (name: keyof typeof ACTIONS): Sparse => matrixOf(basis, ACTIONS[name])

const { nodes, weights } = gaussLegendre(24)
const TURNS = 32
/** Coefficients of a function of the direction. */
const coefficients = (f: (x: number, y: number, z: number) => number) => harmonicMoments(basis, nodes, weights, TURNS,
  Float64Array.from({ length: nodes.length * TURNS }, (_, k) => {
    const z = nodes[Math.floor(k / TURNS)]!
    const phi = 2 * Math.PI * (k % TURNS) / TURNS
    return f(Math.sqrt(1 - z * z) * Math.cos(phi), Math.sqrt(1 - z * z) * Math.sin(phi), z)
  }))
const apply = (m: Sparse, v: Float64Array) => Float64Array.from(m, row => [...row].reduce((total, [c, value]) => total + value * v[c]!, 0))

const f = (x: number, y: number, z: number) => 0.3 + x * y - 2 * z * z * x + 0.7 * y * y * z

describe('matrices of the real spherical harmonics', () => {
  it.each([['x', (x: number, y: number, z: number) => x * f(x, y, z)], ['y', (x: number, y: number, z: number) => y * f(x, y, z)], ['z', (x: number, y: number, z: number) => z * f(x, y, z)]] as const)(
    'multiply by %s', (name, expected) => {
      const got = apply(matrix(name), coefficients(f))
      coefficients(expected).forEach((value, k) => expect(got[k]).toBeCloseTo(value, 12))
    })

  // (m × ∇) f for f = xy − 2z²x + 0.7 y²z + 0.3, by hand.
  it.each([
    ['turnX', (x: number, y: number, z: number) => y * (-4 * z * x + 0.7 * y * y) - z * (x + 1.4 * y * z)],
    ['turnY', (x: number, y: number, z: number) => z * (y - 2 * z * z) - x * (-4 * z * x + 0.7 * y * y)],
    ['turnZ', (x: number, y: number, z: number) => x * (x + 1.4 * y * z) - y * (y - 2 * z * z)],
  ] as const)('turn: %s', (name, expected) => {
    const got = apply(matrix(name), coefficients(f))
    coefficients(expected).forEach((value, k) => expect(got[k]).toBeCloseTo(value, 12))
  })

  it('keep x² + y² + z² = 1 away from the edge of the basis', () => {
    const square = sum(basis.size, [[1, product(matrix('x'), matrix('x'))], [1, product(matrix('y'), matrix('y'))], [1, product(matrix('z'), matrix('z'))]])
    basis.each((l, _, index) => {
      if (l > 4) return
      for (const [c, value] of square[index]!) expect(value).toBeCloseTo(c === index ? 1 : 0, 13)
    })
  })
})
