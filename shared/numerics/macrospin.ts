import { philox, STREAM } from './philox'
import { normalTriple } from './normal'

/**
 * One moment in reduced units: fields in a field scale H_s (A/m), time s = γ0 H_s t/(1+α²).
 *
 *   dm/ds = −[m × A + α m × (m × A)],   A = D m + h + ν + β a p + a (m × p),   a = w(s) · q0/(q1 + q2 m·p)
 *
 * D diagonal (anisotropy and shape), h the uniform field, ν the thermal field, w the drive's waveform. A device may answer to the drive
 * in more ways than by its torque, see `DriveResponse`. ν is white with
 * ⟨ν_i ν_j⟩ = noise · δ_ij δ(s − s′), read in the Stratonovich sense (Brown, Phys. Rev. 130, 1677 (1963)).
 */
export interface Dynamics {
  damping: number
  diagonal: readonly [number, number, number]
  field: readonly [number, number, number]
  reference: readonly [number, number, number]
  /** damping-like coefficient at full amplitude, over the angle-dependent denominator: a = w q0/(q1 + q2 cos θ) */
  torque: { q0: number, q1: number, q2: number }
  fieldLikeRatio: number
  /** strength of the thermal field: 2α/(2Δ_s (1+α²)), with Δ_s = μ0 Ms V H_s/(2 kB T) */
  noise: number
  /** what the drive does; the torque alone, in proportion, where this is left out */
  response?: DriveResponse
}

/** Places in the row that a response fills: a = row[a]/max(q1 + q2 m·p, r1 + r2 m·p), b = β a + c, D = diag(x, y, z), and the noise. */
export const STAGE = { a: 0, c: 1, x: 2, y: 3, z: 4, noise: 5, q1: 6, q2: 7, r1: 8, r2: 9 } as const
export const STAGE_LENGTH = 10

/** Writes the coefficients of the equation under the drive w to `row`. Allocates nothing. */
export type DriveResponse = (drive: number, row: Float64Array) => void

/** The response of a problem, whether it brings one or not. */
export function responseOf(dynamics: Dynamics): DriveResponse {
  const { torque, diagonal, noise } = dynamics
  return dynamics.response ?? ((drive, row) => {
    row[STAGE.a] = drive * torque.q0
    row[STAGE.c] = 0
    row[STAGE.x] = diagonal[0]
    row[STAGE.y] = diagonal[1]
    row[STAGE.z] = diagonal[2]
    row[STAGE.noise] = noise
    row[STAGE.q1] = torque.q1
    row[STAGE.q2] = torque.q2
    row[STAGE.r1] = 0
    row[STAGE.r2] = 0
  })
}

/** A stretch of the waveform over which the drive is linear in time, cut into equal steps. */
export interface Segment { start: number, end: number, from: number, to: number, steps: number }

/**
 * Classical fourth-order Runge–Kutta with the thermal field held over the step, m brought back to the sphere after it; in double precision.
 * The plain statement of what the kernel does, to check and to measure it against. Allocates nothing while stepping.
 */
export class Rk4Stepper {
  readonly m = new Float64Array(3)
  private readonly k = new Float64Array(12)
  private readonly words = new Uint32Array(4)
  private readonly gauss = new Float64Array(3)
  private counter = 0
  private trial = 0
  private nx = 0
  private ny = 0
  private nz = 0

  private readonly respond: DriveResponse
  private readonly rows = [new Float64Array(STAGE_LENGTH), new Float64Array(STAGE_LENGTH), new Float64Array(STAGE_LENGTH)] as const

  constructor(private readonly dynamics: Dynamics, private readonly key: readonly [number, number]) {
    this.respond = responseOf(dynamics)
  }

  /** Starts a trial's noise from its first number. */
  restart(trial: number): void {
    this.trial = trial
    this.counter = 0
  }

  /** Holds this thermal field over the coming steps. */
  holdNoise(x: number, y: number, z: number): void {
    this.nx = x
    this.ny = y
    this.nz = z
  }

  /** Draws the thermal field of the next step of length `step` (reduced time). */
  drawNoise(step: number): void {
    const { words, gauss } = this
    philox(this.counter++, STREAM.noise, this.trial, 0, this.key[0], this.key[1], words)
    normalTriple(words, gauss)
    const scale = Math.sqrt(this.dynamics.noise / step)
    this.holdNoise(scale * gauss[0]!, scale * gauss[1]!, scale * gauss[2]!)
  }

  /** Right-hand side at (x, y, z) with the coefficients of a stage, written to k at `at`. */
  private slope(at: number, x: number, y: number, z: number, row: Float64Array): void {
    const { damping, field, reference, fieldLikeRatio } = this.dynamics
    const px = reference[0]
    const py = reference[1]
    const pz = reference[2]
    const cosine = x * px + y * py + z * pz
    const a = row[STAGE.a]! / Math.max(row[STAGE.q1]! + row[STAGE.q2]! * cosine, row[STAGE.r1]! + row[STAGE.r2]! * cosine)
    const b = fieldLikeRatio * a + row[STAGE.c]!
    const ax = row[STAGE.x]! * x + field[0] + this.nx + b * px + a * (y * pz - z * py)
    const ay = row[STAGE.y]! * y + field[1] + this.ny + b * py + a * (z * px - x * pz)
    const az = row[STAGE.z]! * z + field[2] + this.nz + b * pz + a * (x * py - y * px)
    const ux = y * az - z * ay
    const uy = z * ax - x * az
    const uz = x * ay - y * ax
    const k = this.k
    k[at] = -(ux + damping * (y * uz - z * uy))
    k[at + 1] = -(uy + damping * (z * ux - x * uz))
    k[at + 2] = -(uz + damping * (x * uy - y * ux))
  }

  /** One step of length h with the drive w0, w1 and w2 at its start, middle and end. */
  step(h: number, w0: number, w1: number, w2: number): void {
    const { m, k, rows: [first, middle, last] } = this
    this.respond(w0, first)
    this.respond(w1, middle)
    this.respond(w2, last)
    const x = m[0]!
    const y = m[1]!
    const z = m[2]!
    const half = h / 2
    this.slope(0, x, y, z, first)
    this.slope(3, x + half * k[0]!, y + half * k[1]!, z + half * k[2]!, middle)
    this.slope(6, x + half * k[3]!, y + half * k[4]!, z + half * k[5]!, middle)
    this.slope(9, x + h * k[6]!, y + h * k[7]!, z + h * k[8]!, last)
    const sixth = h / 6
    const nx = x + sixth * (k[0]! + 2 * (k[3]! + k[6]!) + k[9]!)
    const ny = y + sixth * (k[1]! + 2 * (k[4]! + k[7]!) + k[10]!)
    const nz = z + sixth * (k[2]! + 2 * (k[5]! + k[8]!) + k[11]!)
    const norm = 1 / Math.sqrt(nx * nx + ny * ny + nz * nz)
    m[0] = nx * norm
    m[1] = ny * norm
    m[2] = nz * norm
  }
}

/** dm/ds of the noiseless problem, for solvers that bring their own stepping. `out` and `m` are x, y, z. */
export function driftOf(dynamics: Dynamics): (m: ArrayLike<number>, drive: number, out: number[] | Float64Array) => void {
  const { damping, field, reference: p, fieldLikeRatio } = dynamics
  const respond = responseOf(dynamics)
  const row = new Float64Array(STAGE_LENGTH)
  return (m, drive, out) => {
    const [x, y, z] = [m[0]!, m[1]!, m[2]!]
    respond(drive, row)
    const cosine = x * p[0] + y * p[1] + z * p[2]
    const a = row[STAGE.a]! / Math.max(row[STAGE.q1]! + row[STAGE.q2]! * cosine, row[STAGE.r1]! + row[STAGE.r2]! * cosine)
    const b = fieldLikeRatio * a + row[STAGE.c]!
    const ax = row[STAGE.x]! * x + field[0] + b * p[0] + a * (y * p[2] - z * p[1])
    const ay = row[STAGE.y]! * y + field[1] + b * p[1] + a * (z * p[0] - x * p[2])
    const az = row[STAGE.z]! * z + field[2] + b * p[2] + a * (x * p[1] - y * p[0])
    const ux = y * az - z * ay
    const uy = z * ax - x * az
    const uz = x * ay - y * ax
    out[0] = -(ux + damping * (y * uz - z * uy))
    out[1] = -(uy + damping * (z * ux - x * uz))
    out[2] = -(uz + damping * (x * uy - y * ux))
  }
}
