import { CholeskyDecomposition, Matrix } from 'ml-matrix'
import { exactExp } from './elementary'
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
  // Beyond the transverse switching field both paths meet at the equator: one state, not two.
  if (m[2]! * side < 1e-3) return null
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

/**
 * The sampler of a well: in equal-area (Lambert) coordinates u about its minimum, where solid angle is area, E − E_min ≥ c Q(u) with Q the
 * harmonic part and c the least ratio over the side, found on a fine grid. So a normal variate with Q widened by 1/c is an envelope.
 * @param well the minimum, see `findWell`
 */
export function wellSampler(landscape: Landscape, well: readonly [number, number, number]): WellSampler {
  const { stability, diagonal: d, field: h } = landscape
  const { first, second } = frameAround(well)
  const along = well.reduce((sum, c, axis) => sum + c * (d[axis]! * c + h[axis]!), 0)
  const tangent = (a: readonly number[], b: readonly number[]) => a.reduce((sum, c, axis) => sum + d[axis]! * c * b[axis]!, 0)
  const hessian = new Matrix([
    [stability * (along - tangent(first, first)), -stability * tangent(first, second)],
    [-stability * tangent(second, first), stability * (along - tangent(second, second))],
  ])
  const [xx, xy, yy] = [hessian.get(0, 0), hessian.get(0, 1), hessian.get(1, 1)]
  const harmonic = (u: number, v: number) => xx * u * u + 2 * xy * u * v + yy * v * v
  const energy = (x: number, y: number, z: number) => -stability * (d[0] * x * x + d[1] * y * y + d[2] * z * z + 2 * (h[0] * x + h[1] * y + h[2] * z))
  const lowest = energy(...well)
  const m = new Float64Array(3)
  const place = (u: number, v: number): boolean => {
    const square = u * u + v * v
    if (square >= 4) return false
    const [cosine, scale] = [1 - square / 2, Math.sqrt(1 - square / 4)]
    for (let axis = 0; axis < 3; axis++) m[axis] = cosine * well[axis]! + scale * (u * first[axis]! + v * second[axis]!)
    return m[2]! * well[2] > 0
  }
  const [rings, spokes] = [240, 96]
  let ratio = 1
  for (let ring = 1; ring <= rings; ring++) {
    for (let spoke = 0; spoke < spokes; spoke++) {
      const direction = COMPASS[spoke]!
      const [u, v] = [direction[0] * 2 * ring / rings, direction[1] * 2 * ring / rings]
      if (place(u, v)) ratio = Math.min(ratio, (energy(m[0]!, m[1]!, m[2]!) - lowest) / harmonic(u, v))
    }
  }
  const c = GRID_MARGIN * ratio
  const root = new CholeskyDecomposition(hessian.clone().mul(2 * c)).lowerTriangularMatrix
  const [l11, l21, l22] = [root.get(0, 0), root.get(1, 0), root.get(1, 1)]
  return (uniforms, out) => {
    for (;;) {
      const v = normalQuantile(uniforms.next()) / l22
      const u = (normalQuantile(uniforms.next()) - l21 * v) / l11
      const keep = uniforms.next()
      if (place(u, v) && keep <= exactExp(lowest - energy(m[0]!, m[1]!, m[2]!) + c * harmonic(u, v))) {
        out.set(m)
        return
      }
    }
  }
}

/** The least ratio lies between grid points, by less than this. */
const GRID_MARGIN = 0.98

/** Unit vectors around the compass, from basic operations so that the envelope is the same everywhere. */
const COMPASS: readonly (readonly [number, number])[] = Array.from({ length: 96 }, (_, k) => {
  const [side, step] = [Math.floor(k / 24), k % 24]
  const t = -1 + (2 * step + 1) / 24
  const [x, y] = ([[1, t], [-t, 1], [-1, -t], [t, -1]] as const)[side]!
  const norm = Math.sqrt(x * x + y * y)
  return [x / norm, y / norm]
})
