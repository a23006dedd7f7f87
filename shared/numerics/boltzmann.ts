import { EigenvalueDecomposition, Matrix } from 'ml-matrix'
import { exactExp, exactLog } from './elementary'
import { normalQuantile } from './normal'
import type { UniformStream } from './philox'

/**
 * Energy of a moment in a diagonal quadratic and a linear field: E/(kB T) = −Δ (d·m² + 2 h·m), with Δ = μ0 Ms V H_s/(2 kB T)
 * and d, h in the field scale H_s.
 */
export interface Landscape {
  stability: number
  diagonal: readonly [number, number, number]
  field: readonly [number, number, number]
}

/** Field at m in the landscape, in H_s. */
const fieldAt = (landscape: Landscape, m: readonly number[]) =>
  [0, 1, 2].map(c => landscape.diagonal[c]! * m[c]! + landscape.field[c]!)

/**
 * The minimum reached from the pole `side`·ẑ, by following the field with the precession left out.
 * Null when the path leaves that side: the landscape has no second state there.
 */
export function findWell(landscape: Landscape, side: 1 | -1): [number, number, number] | null {
  let m = [0, 0, side as number]
  for (let n = 0; n < 20000; n++) {
    const field = fieldAt(landscape, m)
    const along = field[0]! * m[0]! + field[1]! * m[1]! + field[2]! * m[2]!
    const pull = field.map((f, c) => f - along * m[c]!)
    const size = Math.sqrt(pull.reduce((sum, p) => sum + p * p, 0))
    if (size < 1e-14) break
    const stiffness = Math.max(0.2, ...landscape.diagonal.map(d => Math.abs(d)), size)
    m = m.map((c, axis) => c + 0.3 * pull[axis]! / stiffness)
    const norm = Math.sqrt(m.reduce((sum, c) => sum + c * c, 0))
    m = m.map(c => c / norm)
    if (m[2]! * side <= 0) return null
  }
  // At the pole a field exactly against the moment has no pull although the state is unstable.
  const field = fieldAt(landscape, m)
  const along = field[0]! * m[0]! + field[1]! * m[1]! + field[2]! * m[2]!
  return Math.min(along - landscape.diagonal[0], along - landscape.diagonal[1]) > 0 ? [m[0]!, m[1]!, m[2]!] : null
}

/** Two unit vectors that with `axis` make a right-handed frame; the first lies in the plane of x̂ and the axis. */
export function frameAround(axis: readonly [number, number, number]): { first: [number, number, number], second: [number, number, number] } {
  const [x, y, z] = axis
  const along = Math.abs(x) < 0.9 ? x : y
  const base: [number, number, number] = Math.abs(x) < 0.9 ? [1, 0, 0] : [0, 1, 0]
  const raw = [base[0] - along * x, base[1] - along * y, base[2] - along * z]
  const norm = Math.sqrt(raw[0]! ** 2 + raw[1]! ** 2 + raw[2]! ** 2)
  const first: [number, number, number] = [raw[0]! / norm, raw[1]! / norm, raw[2]! / norm]
  return { first, second: [y * first[2] - z * first[1], z * first[0] - x * first[2], x * first[1] - y * first[0]] }
}

/**
 * Root mean square angle, rad, from the well's minimum in its Boltzmann distribution on the side z·side > 0.
 * Midpoint quadrature in polar coordinates about the minimum; one spoke is enough where everything is symmetric about z.
 */
export function rmsAngle(landscape: Landscape, well: readonly [number, number, number]): number {
  const { first, second } = frameAround(well)
  const { stability, diagonal: d, field: h } = landscape
  const limit = Math.min(Math.PI, 14 / Math.sqrt(Math.max(stability, 0.1)))
  const rings = 600
  const spokes = d[0] === d[1] && h[0] === 0 && h[1] === 0 ? 1 : 48
  const rise = (x: number, y: number, z: number) =>
    stability * (d[0] * x * x + d[1] * y * y + d[2] * z * z + 2 * (h[0] * x + h[1] * y + h[2] * z))
  const floor = rise(...well)
  let weight = 0
  let moment = 0
  for (let ring = 0; ring < rings; ring++) {
    const theta = (ring + 0.5) / rings * limit
    const [sine, cosine] = [Math.sin(theta), Math.cos(theta)]
    let sum = 0
    for (let spoke = 0; spoke < spokes; spoke++) {
      const phi = (spoke + 0.5) / spokes * 2 * Math.PI
      const [u, v] = [sine * Math.cos(phi), sine * Math.sin(phi)]
      const z = cosine * well[2] + u * first[2] + v * second[2]
      if (z * well[2] > 0) sum += Math.exp(rise(cosine * well[0] + u * first[0] + v * second[0], cosine * well[1] + u * first[1] + v * second[1], z) - floor)
    }
    weight += sum * sine
    moment += sum * sine * theta * theta
  }
  return Math.sqrt(moment / weight)
}

/** Draws m from the Boltzmann distribution restricted to z·side > 0, exactly (by rejection). */
export type WellSampler = (uniforms: UniformStream, out: Float64Array) => void

/** The sampler of a landscape: an axial one where everything is symmetric about z, a general one otherwise. */
export function wellSampler(landscape: Landscape, side: 1 | -1): WellSampler {
  const { diagonal: d, field: h } = landscape
  const axial = d[0] === d[1] && h[0] === 0 && h[1] === 0
  const quadratic = d[2] - d[0]
  const linear = side * h[2]
  return axial && quadratic > 0 && quadratic + 2 * linear > 0
    ? axialSampler(landscape.stability, quadratic, linear, side)
    : generalSampler(landscape, side)
}

/** z ∝ exp[Δ(q z² + 2hz)] on (0, 1): truncated exponential in 1 − z as the envelope, since (1 − z)² ≤ 1 − z there. */
function axialSampler(stability: number, quadratic: number, linear: number, side: 1 | -1): WellSampler {
  const rate = stability * (quadratic + 2 * linear)
  const total = 1 - exactExp(-rate)
  return (uniforms, out) => {
    let w: number
    do w = -exactLog(1 - uniforms.next() * total) / rate
    while (!(w <= 1) || uniforms.next() > exactExp(-stability * quadratic * w * (1 - w)))
    const z = 1 - w
    let x: number, y: number, r2: number
    do {
      x = 2 * uniforms.next() - 1
      y = 2 * uniforms.next() - 1
      r2 = x * x + y * y
    } while (r2 > 1 || r2 < 1e-12)
    const scale = Math.sqrt(w * (1 + z) / r2)
    out[0] = x * scale
    out[1] = y * scale
    out[2] = side * z
  }
}

/**
 * Fisher–Bingham by rejection from an angular central Gaussian: Kent, Ganeiban & Mardia, J. Comput. Graph. Stat. 27, 291 (2018)
 * (bound re-derived here). The linear term is first bounded by a quadratic one, t ≤ (t² + t0²)/(2 t0), with the t0 that wastes least.
 */
function generalSampler(landscape: Landscape, side: 1 | -1): WellSampler {
  const { stability, diagonal: d, field: h } = landscape
  const strength = Math.sqrt(h[0] ** 2 + h[1] ** 2 + h[2] ** 2)
  const candidates = strength > 0 ? Array.from({ length: 40 }, (_, n) => (n + 1) / 40) : [1]
  const envelopes = candidates.map((t0) => {
    const matrix = Matrix.zeros(3, 3)
    for (let r = 0; r < 3; r++) {
      matrix.set(r, r, -stability * d[r]!)
      if (strength > 0) for (let c = 0; c < 3; c++) matrix.set(r, c, matrix.get(r, c) - stability * h[r]! * h[c]! / (strength * t0))
    }
    const decomposition = new EigenvalueDecomposition(matrix, { assumeSymmetric: true })
    const values = decomposition.realEigenvalues
    const lowest = Math.min(...values)
    const lambda = values.map(v => v - lowest)
    let low = 1e-9
    let high = 3
    for (let n = 0; n < 80; n++) {
      const b = (low + high) / 2
      if (lambda.reduce((sum, l) => sum + 1 / (b + 2 * l), 0) > 1) low = b
      else high = b
    }
    const b = (low + high) / 2
    const omega = lambda.map(l => 1 + 2 * l / b)
    const offset = stability * strength * t0 - lowest
    const logMass = offset - (3 - b) / 2 + 1.5 * exactLog(3 / b) - 0.5 * omega.reduce((sum, o) => sum + exactLog(o), 0)
    return { vectors: decomposition.eigenvectorMatrix, omega, b, offset, logMass }
  })
  const best = envelopes.reduce((a, c) => c.logMass < a.logMass ? c : a)
  const { vectors, omega, b, offset } = best
  const axes = [0, 1, 2].map(column => [0, 1, 2].map(row => vectors.get(row, column)))
  const logConstant = -(3 - b) / 2 + 1.5 * exactLog(3 / b)
  return (uniforms, out) => {
    for (;;) {
      let x = 0
      let y = 0
      let z = 0
      for (let n = 0; n < 3; n++) {
        const g = normalQuantile(uniforms.next()) / Math.sqrt(omega[n]!)
        x += g * axes[n]![0]!
        y += g * axes[n]![1]!
        z += g * axes[n]![2]!
      }
      const norm = (z * side < 0 ? -1 : 1) / Math.sqrt(x * x + y * y + z * z)
      x *= norm
      y *= norm
      z *= norm
      let quadratic = 0
      for (let n = 0; n < 3; n++) quadratic += omega[n]! * (x * axes[n]![0]! + y * axes[n]![1]! + z * axes[n]![2]!) ** 2
      const target = stability * (d[0] * x * x + d[1] * y * y + d[2] * z * z + 2 * (h[0] * x + h[1] * y + h[2] * z))
      const envelope = offset + logConstant - 1.5 * exactLog(quadratic)
      if (exactLog(uniforms.next()) < target - envelope) {
        out[0] = x
        out[1] = y
        out[2] = z
        return
      }
    }
  }
}
