import { gaussLegendre } from './quadrature'

/**
 * Slow escape over a barrier where everything is collinear with z, by integrals of positive terms alone, so that a rate of e^−300 is as
 * exact as one of order 1. In reduced time the probability of anything yet to come from z obeys
 *
 *   ∂u/∂τ = (1/2Δ) e^−V ∂/∂z[(1 − z²) e^V ∂u/∂z],   V = 2Δ ∫(z + h − i(z)) dz
 *
 * (Brown, Phys. Rev. 130, 1677 (1963); mean first passage after Gardiner, Handbook of Stochastic Methods, section 5.2).
 * Conventions and angle dependence of the drive are those of `axial.ts`.
 */
export interface AxialLandscape {
  /** Δ */
  stability: number
  /** h, positive towards +1 */
  field: number
  /** i at the start near +1, positive towards −1 */
  drive?: number
  torque?: { q1: number, q2: number }
  /** α β */
  fieldLike?: number
}

const ORDER = 16

/** V at z, up to a constant. */
export function axialPotential({ stability, field, drive = 0, torque, fieldLike = 0 }: AxialLandscape): (z: number) => number {
  const { q1, q2 } = torque ?? { q1: 1, q2: 0 }
  const pull = drive * (q1 + q2) * (1 + fieldLike)
  return z => 2 * stability * (z * z / 2 + field * z - (q2 === 0 ? pull * z / q1 : pull / q2 * Math.log(q1 + q2 * z)))
}

/** Gauss–Legendre points of one panel, and the integrals from −1 to each of them of the polynomials through them. */
interface Panel { nodes: Float64Array, weights: Float64Array, partial: Float64Array[] }

function makePanel(): Panel {
  const { nodes, weights } = gaussLegendre(ORDER)
  const legendre = (x: number) => {
    const values = [1, x]
    for (let l = 2; l <= ORDER; l++) values.push(((2 * l - 1) * x * values[l - 1]! - (l - 1) * values[l - 2]!) / l)
    return values
  }
  const at = Array.from(nodes, legendre)
  const partial = at.map(values => weights.map((weight, k) => {
    let sum = 0.5 * (values[1]! + 1)
    for (let l = 1; l < ORDER; l++) sum += 0.5 * at[k]![l]! * (values[l + 1]! - values[l - 1]!)
    return weight * sum
  }))
  return { nodes, weights, partial }
}

const PANEL = makePanel()

/** Functions at the points of a piece of (−1, 1), and their running integrals. */
class Piece {
  readonly z: Float64Array
  /** e^(V − greatest V) */
  readonly density: Float64Array
  private readonly halves: Float64Array
  private readonly conductance: Float64Array

  constructor(private readonly landscape: AxialLandscape, readonly from: number, readonly to: number) {
    const span = to - from
    const steepness = landscape.stability * (2 + 2 * Math.abs(landscape.field) + 2 * Math.abs(landscape.drive ?? 0))
    const panels = Math.max(6, Math.ceil(span * steepness / 4))
    const ends = Array.from({ length: panels + 1 }, (_, k) => from + span * k / panels)
    this.halves = Float64Array.from({ length: panels }, (_, k) => (ends[k + 1]! - ends[k]!) / 2)
    this.z = Float64Array.from({ length: panels * ORDER }, (_, k) => {
      const panel = Math.floor(k / ORDER)
      return ends[panel]! + (PANEL.nodes[k % ORDER]! + 1) * this.halves[panel]!
    })
    const potential = this.z.map(axialPotential(landscape))
    const top = potential.reduce((most, v) => Math.max(most, v), -Infinity)
    const bottom = potential.reduce((least, v) => Math.min(least, v), Infinity)
    if (top - bottom > 650) throw new RangeError('The barrier is too high for double precision.')
    this.density = potential.map(v => Math.exp(v - top))
    this.conductance = this.z.map((z, k) => (1 - z * z) * this.density[k]! / (2 * landscape.stability))
  }

  integral(f: Float64Array): number {
    return f.reduce((sum, v, k) => sum + v * PANEL.weights[k % ORDER]! * this.halves[Math.floor(k / ORDER)]!, 0)
  }

  /** ∫ f from the lower end to each point. */
  rising(f: Float64Array): Float64Array {
    const out = new Float64Array(f.length)
    let base = 0
    for (let p = 0; p < this.halves.length; p++) {
      const half = this.halves[p]!
      for (let j = 0; j < ORDER; j++) {
        let sum = 0
        for (let k = 0; k < ORDER; k++) sum += PANEL.partial[j]![k]! * f[p * ORDER + k]!
        out[p * ORDER + j] = base + half * sum
      }
      for (let k = 0; k < ORDER; k++) base += half * PANEL.weights[k]! * f[p * ORDER + k]!
    }
    return out
  }

  /** ∫ f from each point to the upper end. */
  falling(f: Float64Array): Float64Array {
    return this.mirrored(f, g => this.rising(g))
  }

  /**
   * The u that vanishes at the absorbing end with −B u = f, B the operator above: the mean over all ways there of the integral of f.
   * @param absorbing the end that takes; at the other, a pole, nothing leaves
   */
  solve(f: Float64Array, absorbing: 'lower' | 'upper'): Float64Array {
    const weighted = f.map((v, k) => v * this.density[k]!)
    const beyond = absorbing === 'lower' ? this.falling(weighted) : this.rising(weighted)
    const slope = beyond.map((v, k) => v / this.conductance[k]!)
    return absorbing === 'lower' ? this.rising(slope) : this.falling(slope)
  }

  /** Panels lie evenly: from the other end they are the same ones. */
  private mirrored(f: Float64Array, act: (g: Float64Array) => Float64Array): Float64Array {
    return act(f.slice().reverse()).reverse()
  }
}

/** Least rate at which probability leaves the piece through its absorbing end, by inverse iteration. */
function leavingRate(piece: Piece, absorbing: 'lower' | 'upper'): number {
  let u = new Float64Array(piece.z.length).fill(1)
  let rate = 0
  for (let iteration = 0; iteration < 200; iteration++) {
    const next = piece.solve(u, absorbing)
    const before = rate
    rate = piece.integral(u.map((v, k) => v * piece.density[k]!)) / piece.integral(next.map((v, k) => v * piece.density[k]!))
    const scale = next.reduce((most, v) => Math.max(most, v), 0)
    u = next.map(v => v / scale)
    if (Math.abs(rate - before) <= 1e-15 * rate) break
  }
  return rate
}

/**
 * Lowest nonzero rate λ₁ of the whole of (−1, 1), per unit of reduced time: its function changes sign where both sides, made absorbing
 * there, leave equally fast. Relative error about 1e-13. Throws RangeError for barriers above 650 kT.
 */
export function axialLowestRate(landscape: AxialLandscape): number {
  const imbalance = (node: number) => {
    const right = leavingRate(new Piece(landscape, node, 1), 'lower')
    const left = leavingRate(new Piece(landscape, -1, node), 'upper')
    return { gap: Math.log(right / left), rate: right }
  }
  let [low, high] = [-1 + 1e-6, 1 - 1e-6]
  if (landscape.field === 0 && (landscape.drive ?? 0) === 0) return imbalance(0).rate
  let found = imbalance((low + high) / 2)
  for (let k = 0; k < 100 && high - low > 1e-15; k++) {
    const middle = (low + high) / 2
    found = imbalance(middle)
    if (Math.abs(found.gap) < 1e-14) break
    if (found.gap > 0) high = middle
    else low = middle
  }
  return found.rate
}

/** Height of V's fall from the well near +1 to the barrier's top, in kT, and where the top is; null without a well there. */
export function axialBarrier(landscape: AxialLandscape): { height: number, at: number } | null {
  const v = axialPotential(landscape)
  const { q1, q2 } = landscape.torque ?? { q1: 1, q2: 0 }
  const pull = (landscape.drive ?? 0) * (q1 + q2) * (1 + (landscape.fieldLike ?? 0))
  const slope = (z: number) => z + landscape.field - pull / (q1 + q2 * z)
  if (slope(1) <= 0) return null
  let [low, high] = [-1, 1]
  if (slope(-1) >= 0) return null
  for (let k = 0; k < 200 && high - low > 1e-15; k++) {
    const middle = (low + high) / 2
    if (slope(middle) > 0) high = middle
    else low = middle
  }
  const at = (low + high) / 2
  return { height: v(1) - v(at), at }
}

/**
 * Rate at which the well near +1 loses its moment to the other, per unit of reduced time: λ₁ shared by detailed balance,
 * λ₁·(population beyond the barrier's top). Null where there is no barrier.
 */
export function axialEscapeRate(landscape: AxialLandscape): number | null {
  const barrier = axialBarrier(landscape)
  if (barrier === null) return null
  const near = new Piece(landscape, barrier.at, 1)
  const far = new Piece(landscape, -1, barrier.at)
  const v = axialPotential(landscape)
  const top = (piece: Piece) => piece.z.reduce((most, z) => Math.max(most, v(z)), -Infinity)
  const ratio = near.integral(near.density) / far.integral(far.density) * Math.exp(top(near) - top(far))
  return axialLowestRate(landscape) / (1 + ratio)
}

/**
 * Mean and variance of the reduced time until m_z first crosses 0 under a constant drive, from the zero-drive well's distribution on z > 0.
 */
export function axialFirstPassage(landscape: AxialLandscape): { mean: number, variance: number } {
  const piece = new Piece(landscape, 0, 1)
  const start = piece.z.map(z => Math.exp(landscape.stability * (z * z - 1 + 2 * landscape.field * (z - 1))))
  const total = piece.integral(start)
  const over = (f: Float64Array) => piece.integral(f.map((v, k) => v * start[k]!)) / total
  const first = piece.solve(new Float64Array(piece.z.length).fill(1), 'lower')
  const second = piece.solve(first, 'lower')
  const mean = over(first)
  return { mean, variance: 2 * over(second) - mean * mean }
}
