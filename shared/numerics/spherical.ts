import { edgePieces, rampExponentials } from './axial'
import { BandedLu } from './banded'
import type { Sparse } from './harmonics'
import { ACTIONS, HarmonicBasis, diagonal, harmonicMoments, matrixOf, product, sum } from './harmonics'
import { EXPONENTIAL_POLES } from './pade'
import { gaussLegendre } from './quadrature'

type Vector = readonly [number, number, number]

/**
 * Write errors and slow rates without sampling error for one moment of any direction, by the backward Fokker–Planck equation on the
 * sphere (Brown, Phys. Rev. 130, 1677 (1963)):
 *
 *   ∂u/∂t = v·∇u + (α/2Δ) ∇²u,   v = −m × h_prec + ∇Φ,   h_prec = h(m) + (b − α a) p,   Φ = −αE + (a + α b) m·p
 *
 * with fields in H_s, energies in μ0 Ms H_s V, t in (1 + α²)/(γ0 H_s), Δ = μ0 Ms V H_s/(2 kB T). Expanded in real spherical harmonics the
 * generator is a polynomial in sparse matrices: ∇Φ·∇u = ½[∇²(Φu) − Φ∇²u − u∇²Φ] and −(m × h)·∇u = h·(m × ∇)u.
 * The easy axis is z: turn the device first where it is another.
 *
 * Domain: constant torque efficiency; barriers to about 100 kT along z and transverse stiffness to about 60 kT, beyond which the degree needed
 * grows out of hand. The truncation error shows in a second solution with more functions.
 */
export interface SphericalDevice {
  /** α */
  damping: number
  /** Δ */
  stability: number
  /** k of the quadratic energy E = −½ Σ k m² − h·m, in H_s */
  curvature: Vector
  /** h, in H_s */
  field: Vector
  /** p: a positive drive pulls towards it */
  polarizer: Vector
  /** β: b = β a */
  fieldLike?: number
}

/** Functions of the basis and longest step: degree L, order M, and the step in units of (1 + α²)/(γ0 H_s). */
export interface Resolution { degree: number, order: number, step: number }

/** A trapezoid: a in α H_s at the top, edges in units of τ = α t. */
export interface SphericalPulse { drive: number, edge?: number }

/** B = still + a·driven, in bands. */
class Generator {
  readonly basis: HarmonicBasis
  readonly band: number
  private readonly still: Sparse
  private readonly driven: Sparse

  constructor(device: SphericalDevice, { degree, order }: Resolution) {
    // Products of matrices are exact in the smaller basis when made in one that is larger by their degree.
    const wide = new HarmonicBasis(degree + 2, order + 2)
    const { field: h, polarizer: p } = device
    const turnedAlike = h[0] === 0 && h[1] === 0 && p[0] === 0 && p[1] === 0
    this.basis = new HarmonicBasis(degree, order, turnedAlike ? 2 : 1)
    this.band = this.basis.band(2)
    const make = (action: keyof typeof ACTIONS) => matrixOf(wide, ACTIONS[action])
    const coordinates = [make('x'), make('y'), make('z')]
    const turns = [make('turnX'), make('turnY'), make('turnZ')]
    const one = diagonal(wide, () => 1)
    const laplace = diagonal(wide, l => -l * (l + 1))
    const squares = coordinates.map(c => product(c, c))
    const add = (parts: (readonly [number, Sparse])[]) => sum(wide.size, parts)
    /** ∇Φ·∇ for Φ with its Laplacian. */
    const climb = (phi: Sparse, laplacian: Sparse) =>
      add([[0.5, product(laplace, phi)], [-0.5, product(phi, laplace)], [-0.5, laplacian]])
    const { damping: alpha, stability, curvature, field, polarizer, fieldLike = 0 } = device
    const energy = add([...squares.map((s, k) => [-0.5 * curvature[k]!, s] as const), ...coordinates.map((c, k) => [-field[k]!, c] as const)])
    const energyLaplacian = add([
      ...squares.map((s, k) => [3 * curvature[k]!, s] as const), [-(curvature[0] + curvature[1] + curvature[2]), one],
      ...coordinates.map((c, k) => [2 * field[k]!, c] as const),
    ])
    const along = add(coordinates.map((c, k) => [polarizer[k]!, c] as const))
    const still = add([
      ...turns.map((turn, k) => [1, product(add([[curvature[k]!, coordinates[k]!], [field[k]!, one]]), turn)] as const),
      [-alpha, climb(energy, energyLaplacian)], [alpha / (2 * stability), laplace],
    ])
    const driven = add([
      ...turns.map((turn, k) => [(fieldLike - alpha) * polarizer[k]!, turn] as const),
      [1 + alpha * fieldLike, climb(along, add([[-2, along]]))],
    ])
    this.still = this.restrict(wide, still)
    this.driven = this.restrict(wide, driven)
  }

  private restrict(wide: HarmonicBasis, matrix: Sparse): Sparse {
    const places = new Map<number, number>()
    const rows: Sparse = []
    this.basis.each((l, m, index) => places.set(wide.index(l, m), index))
    this.basis.each((l, m) => {
      const row = new Map<number, number>()
      for (const [c, value] of matrix[wide.index(l, m)]!) {
        const column = places.get(c)
        if (column !== undefined && Math.abs(value) > 1e-14) row.set(column, value)
      }
      rows.push(row)
    })
    return rows
  }

  /** The bands of still + a·driven, the constant function left out: nothing flows from it. */
  bands(a: number, transposed = false): Float64Array {
    const { band, basis: { size } } = this
    const width = 2 * band + 1
    const out = new Float64Array((size - 1) * width)
    const fill = (matrix: Sparse, factor: number) => matrix.forEach((row, r) => {
      for (const [c, value] of row) {
        if (r === 0 || c === 0) continue
        const [at, to] = transposed ? [c - 1, r - 1] : [r - 1, c - 1]
        out[at * width + to - at + band]! += factor * value
      }
    })
    fill(this.still, 1)
    fill(this.driven, a)
    return out
  }

  /** What flows from each function into the constant one: the first row. */
  intoConstant(a: number): Float64Array {
    const out = new Float64Array(this.basis.size)
    for (const [c, value] of this.still[0]!) out[c]! += value
    for (const [c, value] of this.driven[0]!) out[c]! += a * value
    return out
  }

  get identity(): Float64Array {
    const { band, basis: { size } } = this
    const out = new Float64Array((size - 1) * (2 * band + 1))
    for (let r = 0; r < size - 1; r++) out[r * (2 * band + 1) + band] = 1
    return out
  }
}

/** e^{step·B} at one drive on all but the constant function. */
class Propagator {
  private readonly factors: BandedLu[]
  constructor(g: Generator, private readonly n: number, a: number, step: number) {
    const bands = g.bands(a)
    const identity = g.identity
    this.factors = EXPONENTIAL_POLES.map(pole => new BandedLu(n, g.band, bands, identity, step, pole))
  }

  apply(x: Float64Array, transposed = false): void {
    const [re, im, total] = [new Float64Array(this.n), new Float64Array(this.n), new Float64Array(this.n)]
    this.factors.forEach((lu, k) => {
      const { residueRe, residueIm } = EXPONENTIAL_POLES[k]!
      re.set(x)
      im.fill(0)
      if (transposed) lu.solveTransposed(re, im)
      else lu.solve(re, im)
      for (let r = 0; r < this.n; r++) total[r]! += 2 * (residueRe * re[r]! - residueIm * im[r]!)
    })
    x.set(total)
  }
}

/** Solves B y = x (or its transpose) without the constant function. */
function solver(g: Generator, a: number, transposed = false): (x: Float64Array) => void {
  const n = g.basis.size - 1
  const lu = new BandedLu(n, g.band, g.bands(a, transposed), g.identity, 1, { re: 0, im: 0 })
  const zero = new Float64Array(n)
  return (x) => {
    zero.fill(0)
    lu.solve(x, zero)
  }
}

/** Points on z > 0 or z < 0 with weights, and even angles. */
function grid(basis: HarmonicBasis, from: number, to: number) {
  const { nodes, weights } = gaussLegendre(basis.degree + 100)
  const half = (to - from) / 2
  return { z: nodes.map(v => from + (v + 1) * half), weights: weights.map(w => w * half), turns: Math.max(32, 4 * basis.order) }
}

/** The zero-drive Boltzmann distribution on z·side > 0 in the functions after the constant one, whose own part is 1. */
function wellMoments(basis: HarmonicBasis, { stability, curvature, field }: SphericalDevice, side: 1 | -1): Float64Array {
  const { z, weights, turns } = side > 0 ? grid(basis, 0, 1) : grid(basis, -1, 0)
  const log = new Float64Array(z.length * turns)
  for (let k = 0; k < z.length; k++) {
    const s = Math.sqrt(1 - z[k]! * z[k]!)
    for (let j = 0; j < turns; j++) {
      const [x, y] = [s * Math.cos(2 * Math.PI * j / turns), s * Math.sin(2 * Math.PI * j / turns)]
      log[k * turns + j] = stability * (curvature[0] * x * x + curvature[1] * y * y + curvature[2] * z[k]! * z[k]! + 2 * (field[0] * x + field[1] * y + field[2] * z[k]!))
    }
  }
  const top = log.reduce((most, v) => Math.max(most, v), -Infinity)
  const moments = harmonicMoments(basis, z, weights, turns, log.map(v => Math.exp(v - top)))
  return moments.slice(1).map(v => v / moments[0]!)
}

/** Coefficients of 1 on z > 0. */
function upperHalf(basis: HarmonicBasis): Float64Array {
  const { z, weights } = grid(basis, 0, 1)
  return harmonicMoments(basis, z, weights, 4 * basis.order + 4, new Float64Array(z.length * (4 * basis.order + 4)).fill(1))
}

const SHORTEST = 1 / 1024
/** Coefficient of the function 1. */
const FULL = Math.sqrt(4 * Math.PI)
/** Reduced time to settle after a pulse, in steps short enough for a Padé step to be exact in what decides. */
const SETTLING = { step: 2, steps: 10 }

/**
 * Write error at each of the reduced widths τ = α t (ascending, half amplitude to half amplitude, none below the edge), from the well on
 * z > 0 for a pulse that should take the moment to z < 0.
 */
export function sphericalWriteErrors(device: SphericalDevice, pulse: SphericalPulse, widths: ArrayLike<number>, rule: 'afterSettling' | 'atPulseEnd', resolution: Resolution): Float64Array {
  const { damping: alpha } = device
  const { drive, edge = 0 } = pulse
  const g = new Generator(device, resolution)
  const n = g.basis.size - 1
  const full = upperHalf(g.basis)
  const x = full.slice(1)
  let constant = full[0]!
  /** The part in the constant function after x has changed: the stationary mean stays. */
  const balance = (a: number) => {
    const state = stationary(g, a)
    return { state, mean: constant + dot(state, x) }
  }
  if (rule === 'afterSettling') {
    const { state, mean } = balance(0)
    const settle = new Propagator(g, n, 0, SETTLING.step / alpha)
    for (let k = 0; k < SETTLING.steps; k++) settle.apply(x)
    constant = mean - dot(state, x)
    // Whoever has settled in a well counts for it, also what has left it again by now.
    const [near, far] = [1, -1].map(side => constant + dot(wellMoments(g.basis, device, side as 1 | -1), x)) as [number, number]
    constant = (constant - far) / (near - far) * FULL
    for (let k = 0; k < n; k++) x[k]! *= FULL / (near - far)
  }
  let origin = wellMoments(g.basis, device, 1)
  if (edge > 0) {
    for (const { drive: i, step } of rampExponentials(rampPieces(edge, alpha, resolution.step, true), s => drive * s / edge)) {
      const { state, mean } = balance(alpha * i)
      new Propagator(g, n, alpha * i, step / alpha).apply(x)
      constant = mean - dot(state, x)
    }
    for (const { drive: i, step } of rampExponentials(rampPieces(edge, alpha, resolution.step, false), s => drive * s / edge)) {
      const state = stationary(g, alpha * i)
      const away = origin.map((v, k) => v - state[k]!)
      new Propagator(g, n, alpha * i, step / alpha).apply(away, true)
      origin = away.map((v, k) => v + state[k]!)
    }
  }
  const { state, mean } = balance(alpha * drive)
  // What is left in the near well under the drive for ever. Where it is nothing, truncation would leave something.
  const { stability, field, polarizer } = device
  const floor = Math.exp(4 * stability * (field[2] + drive * polarizer[2])) < 1e-15 ? 0 : mean / FULL
  const weight = origin.map((v, k) => (v - state[k]!) / FULL)
  const errors = new Float64Array(widths.length)
  const longest = alpha * resolution.step
  const propagators = new Map<string, Propagator>()
  let now = 0
  for (let k = 0; k < widths.length; k++) {
    const target = widths[k]! - edge
    while (target - now > 1e-13 * widths[k]!) {
      const most = Math.min(longest, Math.max(longest * SHORTEST, now))
      const pieces = Math.ceil((target - now) / most)
      const step = pieces === 1 ? target - now : now < longest ? most : (target - now) / pieces
      const key = step.toPrecision(12)
      let propagator = propagators.get(key)
      if (propagator === undefined) propagators.set(key, propagator = new Propagator(g, n, alpha * drive, step / alpha))
      propagator.apply(x)
      now += step
    }
    errors[k] = floor + dot(weight, x)
  }
  return errors
}

const dot = (a: Float64Array, b: Float64Array): number => {
  let total = 0
  for (let k = 0; k < a.length; k++) total += a[k]! * b[k]!
  return total
}

/** Pieces of an edge, in τ, none longer than a step. */
const rampPieces = (edge: number, alpha: number, step: number, graded: boolean) =>
  edgePieces(edge, graded).flatMap(({ from, to }) => {
    const parts = Math.ceil((to - from) / (2 * alpha * step))
    return Array.from({ length: parts }, (_, k) => ({ from: from + (to - from) * k / parts, to: from + (to - from) * (k + 1) / parts }))
  })

/** The stationary state at a drive in the functions after the constant one, whose own part is 1: the left null vector of B. */
function stationary(g: Generator, a: number): Float64Array {
  const x = g.intoConstant(a).slice(1).map(v => -v)
  solver(g, a, true)(x)
  return x
}

/**
 * Lowest nonzero rate λ₁ under a constant drive, per unit of τ = α t, by inverse iteration. Reliable while λ₁ is above about 1e-10 of the
 * rate within the wells; null where the iteration finds no real one.
 */
export function sphericalLowestRate(device: SphericalDevice, drive: number, resolution: Resolution): number | null {
  const g = new Generator(device, resolution)
  const solve = solver(g, device.damping * drive)
  const n = g.basis.size - 1
  const x = upperHalf(g.basis).slice(1)
  for (let k = 0; k < n; k++) x[k]! += 1e-3 * Math.sin(k + 1)
  let rate = 0
  for (let iteration = 0; iteration < 300; iteration++) {
    const before = x.slice()
    solve(x)
    const found = -dot(before, before) / dot(before, x)
    const size = Math.sqrt(dot(x, x))
    for (let k = 0; k < n; k++) x[k]! /= size
    if (Math.abs(found - rate) <= 1e-13 * Math.abs(found)) return found / device.damping
    rate = found
  }
  return null
}
