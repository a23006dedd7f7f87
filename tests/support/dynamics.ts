import { Solver } from 'odex'
import { EigenvalueDecomposition, Matrix } from 'ml-matrix'
import { driftOf } from '#shared/numerics/macrospin'
import type { Dynamics } from '#shared/numerics/macrospin'

/** A free moment at T = 0 in reduced units; change what a check needs. */
export const quiet = (changes: Partial<Dynamics> = {}): Dynamics => ({
  damping: 0.01, diagonal: [0, 0, 1], field: [0, 0, 0], reference: [0, 0, 1], torque: { q0: 0, q1: 1, q2: 0 }, fieldLikeRatio: 0, noise: 0, ...changes,
})

/** m after the reduced time `end` under a full drive; `watch` sees every accepted step with its dense output. */
export function integrate(dynamics: Dynamics, m0: number[], end: number, watch?: (before: number, now: number, m: number[], dense: (component: number, s: number) => number) => void): number[] {
  const drift = driftOf(dynamics)
  const solver = new Solver(3)
  solver.denseOutput = true
  solver.absoluteTolerance = solver.relativeTolerance = 1e-13
  solver.maxSteps = 1e6
  const out = [0, 0, 0]
  return solver.solve((_s, y) => {
    drift(y, 1, out)
    return out.slice()
  }, 0, m0, end, (_n, before, now, y, dense) => {
    watch?.(before, now, y, dense)
    return undefined
  }).y
}

/** Eigenvalues of the motion linearised about m (a fixed point), in the plane tangent to the sphere, per reduced time. */
export function linearModes(dynamics: Dynamics, m: [number, number, number], tangent: [number[], number[]]): { real: number[], imaginary: number[] } {
  const drift = driftOf(dynamics)
  const size = 1e-6
  const jacobian = Matrix.zeros(2, 2)
  for (let column = 0; column < 2; column++) {
    const [plus, minus] = [1, -1].map((sign) => {
      const v = m.map((c, axis) => c + sign * size * tangent[column]![axis]!)
      const norm = Math.hypot(...v)
      const out = [0, 0, 0]
      drift(v.map(c => c / norm), 1, out)
      return out
    })
    for (let row = 0; row < 2; row++) jacobian.set(row, column, tangent[row]!.reduce((sum, t, axis) => sum + t * (plus![axis]! - minus![axis]!) / (2 * size), 0))
  }
  const decomposition = new EigenvalueDecomposition(jacobian)
  return { real: decomposition.realEigenvalues, imaginary: decomposition.imaginaryEigenvalues }
}

/** Zero of a function that changes sign between `low` and `high`. */
export function zeroOf(f: (x: number) => number, low: number, high: number): number {
  const sign = Math.sign(f(low))
  for (let n = 0; n < 80; n++) {
    const middle = (low + high) / 2
    if (Math.sign(f(middle)) === sign) low = middle
    else high = middle
  }
  return (low + high) / 2
}
