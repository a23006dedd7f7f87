import { BandedLu } from './banded'
import { EXPONENTIAL_POLES } from './pade'
import { gaussLegendre } from './quadrature'

/**
 * Write errors without sampling error where everything is collinear with z, by the backward (adjoint) Fokker–Planck equation.
 *
 *   ∂u/∂τ = (1 − z²)(z + h − i(z)) ∂u/∂z + (1/2Δ) ∂/∂z[(1 − z²) ∂u/∂z]
 *
 * u(z, τ) is the probability that a pulse of reduced width τ fails when it finds the moment at z; the moment starts near +1 and i > 0
 * pulls towards −1, h > 0 holds the start (Brown, Phys. Rev. 130, 1677 (1963); Butler et al., IEEE Trans. Magn. 48, 4684 (2012)).
 * The drive is i(z) = i·(q1 + q2)/(q1 + q2 z), so that i is its value at the start; field-like torque adds −α β i(z) to h.
 *
 * Legendre–Galerkin in z with every integral exact, so that the matrices are banded; in τ a (5, 6) Padé step, short at first and longer
 * later. Going backwards keeps small numbers exact in relative terms: the constant part of u, which does not decay, is left out and put
 * back from the stationary state, in which the mean of u never changes.
 */
export interface AxialDevice {
  /** Δ */
  stability: number
  /** h, positive towards the start */
  field: number
  /** angle dependence of the torque seen from the start: i(z) ∝ 1/(q1 + q2 z) */
  torque?: { q1: number, q2: number }
  /** α β of the field-like torque */
  fieldLike?: number
}

/** Which end counts as a failure; see `failureRuleSchema`. */
export type AxialRule = 'afterSettling' | 'atPulseEnd' | 'neverCrossed'

interface Basis {
  n: number
  band: number
  /** on (0, 1) and zero at the equator, instead of (−1, 1) */
  absorbing: boolean
  left: number
  nodes: Float64Array
  weights: Float64Array
  /** values and z-derivatives of the functions at the nodes, row by function */
  values: Float64Array[]
  slopes: Float64Array[]
}

const BAND = 6

function makeBasis(n: number, absorbing: boolean): Basis {
  const left = absorbing ? 0 : -1
  const stretch = 2 / (1 - left)
  const { nodes: x, weights } = gaussLegendre(n + 6)
  const count = x.length
  const legendre = Array.from({ length: n + 1 }, () => new Float64Array(count))
  const derivative = Array.from({ length: n + 1 }, () => new Float64Array(count))
  for (let k = 0; k < count; k++) {
    legendre[0]![k] = 1
    legendre[1]![k] = x[k]!
    derivative[1]![k] = 1
    for (let l = 2; l <= n; l++) {
      legendre[l]![k] = ((2 * l - 1) * x[k]! * legendre[l - 1]![k]! - (l - 1) * legendre[l - 2]![k]!) / l
      derivative[l]![k] = derivative[l - 2]![k]! + (2 * l - 1) * legendre[l - 1]![k]!
    }
  }
  const norm = (l: number) => Math.sqrt(l + 0.5)
  const values: Float64Array[] = []
  const slopes: Float64Array[] = []
  for (let l = 0; l < n; l++) {
    // P_l + P_{l+1} vanishes at the absorbing end.
    const [own, next] = absorbing ? [norm(l) / Math.SQRT2, norm(l) / Math.SQRT2] : [norm(l), 0]
    values.push(legendre[l]!.map((v, k) => own * v + next * legendre[l + 1]![k]!))
    slopes.push(derivative[l]!.map((v, k) => stretch * (own * v + next * derivative[l + 1]![k]!)))
  }
  return { n, band: BAND, absorbing, left, nodes: x.map(v => left + (v + 1) / stretch), weights: weights.map(w => w / stretch), values, slopes }
}

/** The generator M⁻¹(A₀ + i A₁): linear in the drive i. */
interface Generator { still: Float64Array, driven: Float64Array, m: Float64Array }

function generator(basis: Basis, device: AxialDevice): Generator {
  const { n, band, nodes, weights, values, slopes } = basis
  const { q1, q2 } = device.torque ?? { q1: 1, q2: 0 }
  const width = 2 * band + 1
  const [still, driven, m] = [new Float64Array(n * width), new Float64Array(n * width), new Float64Array(n * width)]
  const q = nodes.map(z => q1 + q2 * z)
  const drift = nodes.map((z, k) => weights[k]! * (1 - z * z) * q[k]! * (z + device.field))
  const pull = nodes.map((z, k) => -weights[k]! * (1 - z * z) * (q1 + q2) * (1 + (device.fieldLike ?? 0)))
  const spread = nodes.map((z, k) => weights[k]! * (1 - z * z) / (2 * device.stability))
  for (let r = 0; r < n; r++) {
    for (let c = Math.max(0, r - band); c <= Math.min(n - 1, r + band); c++) {
      let [sumStill, sumDriven, sumM] = [0, 0, 0]
      const [vr, sr, vc, sc] = [values[r]!, slopes[r]!, values[c]!, slopes[c]!]
      for (let k = 0; k < nodes.length; k++) {
        sumM += weights[k]! * q[k]! * vr[k]! * vc[k]!
        sumStill += (drift[k]! * vr[k]! - spread[k]! * (q2 * vr[k]! + q[k]! * sr[k]!)) * sc[k]!
        sumDriven += pull[k]! * vr[k]! * sc[k]!
      }
      const at = r * width + c - r + band
      still[at] = sumStill
      driven[at] = sumDriven
      m[at] = sumM
    }
  }
  return { still, driven, m }
}

/** e^{step·M⁻¹A} at one drive, applied again and again. */
class Propagator {
  private readonly factors: BandedLu[]
  private readonly right: Float64Array
  private readonly re: Float64Array
  private readonly im: Float64Array
  constructor(private readonly basis: Basis, private readonly g: Generator, drive: number, step: number) {
    const a = g.still.map((value, k) => value + drive * g.driven[k]!)
    this.factors = EXPONENTIAL_POLES.map(pole => new BandedLu(basis.n, basis.band, a, g.m, step, pole))
    this.right = new Float64Array(basis.n)
    this.re = new Float64Array(basis.n)
    this.im = new Float64Array(basis.n)
  }

  apply(x: Float64Array): void {
    this.times(x, this.right)
    this.sumOverPoles(this.right, x, (lu, re, im) => lu.solve(re, im))
  }

  /** The transposed map: takes a functional over the states backwards. */
  applyTransposed(x: Float64Array): void {
    this.sumOverPoles(x, this.right, (lu, re, im) => lu.solveTransposed(re, im))
    this.times(this.right, x)
  }

  /** M x; M is symmetric. */
  private times(x: Float64Array, out: Float64Array): void {
    const { basis: { n, band }, g } = this
    const width = 2 * band + 1
    for (let r = 0; r < n; r++) {
      let sum = 0
      for (let c = Math.max(0, r - band); c <= Math.min(n - 1, r + band); c++) sum += g.m[r * width + c - r + band]! * x[c]!
      out[r] = sum
    }
  }

  private sumOverPoles(from: Float64Array, out: Float64Array, solve: (lu: BandedLu, re: Float64Array, im: Float64Array) => void): void {
    const { re, im } = this
    const sum = new Float64Array(this.basis.n)
    this.factors.forEach((lu, k) => {
      const { residueRe, residueIm } = EXPONENTIAL_POLES[k]!
      re.set(from)
      im.fill(0)
      solve(lu, re, im)
      for (let r = 0; r < sum.length; r++) sum[r]! += 2 * (residueRe * re[r]! - residueIm * im[r]!)
    })
    out.set(sum)
  }
}

/** Points and weights: Σ w f(z) is a mean or an integral of f. */
interface Weighted { z: Float64Array, w: Float64Array }

/** Gauss–Legendre points on pieces between the given ends, where a function may step or bend, weighted with `density`. */
function weighted(ends: readonly number[], count: number, density: (z: number) => number): Weighted {
  const { nodes, weights } = gaussLegendre(count)
  const pieces = ends.length - 1
  const z = new Float64Array(pieces * count)
  const w = new Float64Array(pieces * count)
  for (let piece = 0; piece < pieces; piece++) {
    const half = (ends[piece + 1]! - ends[piece]!) / 2
    for (let k = 0; k < count; k++) {
      const at = piece * count + k
      z[at] = ends[piece]! + (nodes[k]! + 1) * half
      w[at] = weights[k]! * half * density(z[at]!)
    }
  }
  return { z, w }
}

/** Weighted with exp(potential), normalised to 1. */
function distribution(ends: readonly number[], count: number, potential: (z: number) => number): Weighted {
  const top = Math.max(...weighted(ends, count, () => 1).z.map(potential))
  const { z, w } = weighted(ends, count, v => Math.exp(potential(v) - top))
  const sum = w.reduce((total, v) => total + v, 0)
  return { z, w: w.map(v => v / sum) }
}

/** Σ w φ_l(z) for every basis function. */
function moments(basis: Basis, { z, w }: Weighted): Float64Array {
  const stretch = 2 / (1 - basis.left)
  const sums = new Float64Array(basis.n)
  for (let k = 0; k < z.length; k++) {
    const x = (z[k]! - basis.left) * stretch - 1
    let [before, now] = [0, 1]
    for (let l = 0; l < basis.n; l++) {
      const next = ((2 * l + 1) * x * now - l * before) / (l + 1)
      sums[l]! += w[k]! * Math.sqrt(l + 0.5) * (basis.absorbing ? (now + next) / Math.SQRT2 : now)
      before = now
      now = next
    }
  }
  return sums
}

/** The zero-drive well's distribution ∝ exp[Δ(z² + 2hz)] on z > 0. */
const startDistribution = (device: AxialDevice): Weighted =>
  distribution([0, 0.5, 1], 120, z => device.stability * (z * z + 2 * device.field * z))

/** The stationary state under the drive, ∝ exp(2Δ ∫(z + h − i(z)) dz). */
function stationaryDistribution(device: AxialDevice, drive: number): Weighted {
  const { q1, q2 } = device.torque ?? { q1: 1, q2: 0 }
  const pull = drive * (q1 + q2) * (1 + (device.fieldLike ?? 0))
  return distribution([-1, -0.9, -0.5, 0, 0.5, 0.9, 1], 100, z =>
    2 * device.stability * (z * z / 2 + device.field * z - (q2 === 0 ? pull * z / q1 : pull / q2 * Math.log(q1 + q2 * z))))
}

/** Probability that the moment, left alone at z, reaches +0.9 of the starting well before 0.9 of the other: scale function of the diffusion. */
function settlingProbability(device: AxialDevice): (z: number) => number {
  const count = 4000
  const from = -0.9
  const step = 1.8 / count
  const density = (z: number) => Math.exp(-device.stability * (z * z + 2 * device.field * z)) / (1 - z * z)
  const cumulative = new Float64Array(count + 1)
  for (let k = 0; k < count; k++) {
    const z = from + k * step
    cumulative[k + 1] = cumulative[k]! + step / 6 * (density(z) + 4 * density(z + step / 2) + density(z + step))
  }
  const total = cumulative[count]!
  return (z) => {
    if (z <= from) return 0
    if (z >= 0.9) return 1
    const at = (z - from) / step
    const k = Math.min(count - 1, Math.floor(at))
    return (cumulative[k]! + (at - k) * (cumulative[k + 1]! - cumulative[k]!)) / total
  }
}

/** A trapezoid in reduced time: drive i at the top, linear edges. */
export interface AxialPulse { drive: number, edge?: number }

/** Pieces of an edge in the order of the backward equation: short where the terminal function is still rough. */
export function edgePieces(edge: number, graded: boolean): { from: number, to: number }[] {
  const pieces: { from: number, to: number }[] = []
  const even = Math.max(6, Math.ceil(edge / 0.05))
  let at = 0
  while (at < edge * (1 - 1e-12)) {
    const step = graded ? Math.min(edge / even, Math.max(SHORTEST, at)) : edge / even
    const to = edge - at - step < 1e-9 * edge ? edge : at + step
    pieces.push({ from: at, to })
    at = to
  }
  return pieces
}

/**
 * Drives and lengths of the exponentials that carry the solution over a ramp: the commutator-free fourth-order Magnus scheme
 * (Alvermann & Fehske, J. Comput. Phys. 230, 5930 (2011)), which here needs two exponentials at mean drives.
 */
export function rampExponentials(pieces: readonly { from: number, to: number }[], driveAt: (s: number) => number): { drive: number, step: number }[] {
  const shift = Math.sqrt(3) / 6
  const [heavy, light] = [0.5 + 2 * shift, 0.5 - 2 * shift]
  return pieces.flatMap(({ from, to }) => {
    const h = to - from
    const first = driveAt(from + h * (0.5 - shift))
    const second = driveAt(from + h * (0.5 + shift))
    return [{ drive: heavy * first + light * second, step: h / 2 }, { drive: light * first + heavy * second, step: h / 2 }]
  })
}

/**
 * Write error at each of the reduced widths (ascending, half amplitude to half amplitude, none below the edge).
 * @param modes basis functions; solve again with more to see the truncation error
 */
export function axialWriteErrors(device: AxialDevice, pulse: AxialPulse, widths: ArrayLike<number>, rule: AxialRule, modes = defaultModes(device, pulse.drive)): Float64Array {
  const { drive, edge = 0 } = pulse
  const absorbing = rule === 'neverCrossed'
  const basis = makeBasis(modes, absorbing)
  const g = generator(basis, device)
  const terminal = absorbing ? () => 1 : rule === 'atPulseEnd' ? (z: number) => z > 0 ? 1 : 0 : settlingProbability(device)
  const x = terminalCoefficients(basis, terminal)
  const start = moments(basis, startDistribution(device))
  if (edge > 0) {
    // Backwards the fall comes first, from its end; the rise acts on the start's distribution, from its beginning.
    for (const { drive: i, step } of rampExponentials(edgePieces(edge, true), s => drive * s / edge)) new Propagator(basis, g, i, step).apply(x)
    for (const { drive: i, step } of rampExponentials(edgePieces(edge, false), s => drive * s / edge)) new Propagator(basis, g, i, step).applyTransposed(start)
  }
  const resting = absorbing ? null : stationaryDistribution(device, drive)
  const stationary = resting === null ? null : moments(basis, resting)
  const floor = resting === null || stationary === null ? 0 : stationaryFailure(resting, stationary, x, edge > 0 ? null : terminal)
  const errors = new Float64Array(widths.length)
  const read = () => {
    let sum = floor
    for (let l = absorbing ? 0 : 1; l < basis.n; l++) sum += x[l]! * (start[l]! - (stationary === null ? 0 : stationary[l]!))
    return sum
  }
  if (!absorbing) x[0] = 0
  let now = 0
  const propagators = new Map<string, Propagator>()
  const advance = (step: number) => {
    const key = step.toPrecision(12)
    let propagator = propagators.get(key)
    if (propagator === undefined) propagators.set(key, propagator = new Propagator(basis, g, drive, step))
    propagator.apply(x)
    if (!absorbing) x[0] = 0
  }
  for (let k = 0; k < widths.length; k++) {
    const target = widths[k]! - edge
    while (target - now > 1e-13 * widths[k]!) {
      const longest = Math.min(0.25, Math.max(SHORTEST, now))
      const pieces = Math.ceil((target - now) / longest)
      const step = pieces === 1 ? target - now : now < 0.25 ? longest : (target - now) / pieces
      advance(step)
      now += step
    }
    errors[k] = read()
  }
  return errors
}

const SHORTEST = 1 / 1024

/**
 * Failure probability from the stationary state. Without edges by quadrature of the terminal function itself; after a fall from the
 * coefficients, whose rounding (1e-15) hides anything smaller: below 1e-14 it counts as none.
 */
function stationaryFailure(resting: Weighted, stationary: Float64Array, x: Float64Array, terminal: ((z: number) => number) | null): number {
  if (terminal !== null) return resting.w.reduce((sum, w, k) => sum + w * terminal(resting.z[k]!), 0)
  const sum = x.reduce((total, c, l) => total + c * stationary[l]!, 0)
  return Math.abs(sum) < 1e-14 ? 0 : sum
}

/** Enough for the start's spread and the drive's boundary layers; checked against twice as many. */
export const defaultModes = (device: AxialDevice, drive: number) => Math.ceil(40 + 9 * Math.sqrt(device.stability * (1 + Math.abs(drive) / 3)))

/** Coefficients of the terminal function in the basis. */
function terminalCoefficients(basis: Basis, f: (z: number) => number): Float64Array {
  const right = moments(basis, weighted(basis.absorbing ? [0, 1] : [-1, -0.9, 0, 0.9, 1], Math.max(200, basis.n + 40), f))
  if (!basis.absorbing) return right
  // The absorbing basis is not orthogonal: solve with its own mass matrix, without the torque's weight.
  const { m } = generator(basis, { stability: 1, field: 0 })
  new BandedLu(basis.n, basis.band, new Float64Array(m.length), m, 0, { re: -1, im: 0 }).solve(right, new Float64Array(basis.n))
  return right
}
