import { axialWriteErrors } from '../numerics/axial'
import type { AxialDevice, AxialPulse } from '../numerics/axial'
import type { FailureRule, JobSpec } from '../schemas/job'
import type { Problem } from './problem'
import { prepareProblem } from './problem'

/** Write errors below this are not given: the start's own far tail and the model itself are no longer known to it. */
export const LEAST_WRITE_ERROR = 1e-15

/** A job in the terms of the axial Fokker–Planck equation, its start near +1. */
export interface CollinearProblem {
  device: AxialDevice
  pulse: AxialPulse
  /** τ of one second */
  tauRate: number
  /** width and edge, s */
  width: number
  edge: number
}

/** The axial equation of a job, or in words what keeps it from having one. */
export function collinearProblem(spec: JobSpec, problem: Problem = prepareProblem(spec)): CollinearProblem | string {
  const { dynamics, landscape, side, tauRate, reducedDrive } = problem
  const { device, write } = spec
  if (write.waveform) return 'the waveform is more than one pulse'
  if (spec.start) return 'the start is not the well’s own distribution'
  if (dynamics.response) return 'the drive does more than exert a torque in proportion to it'
  if (dynamics.diagonal[0] !== dynamics.diagonal[1]) return 'the cell is not the same in all directions across the easy axis'
  if (dynamics.reference[0] !== 0 || dynamics.reference[1] !== 0) return 'the reference layer is tilted'
  if (landscape.field[0] !== 0 || landscape.field[1] !== 0) return 'the field has a part across the easy axis'
  const { q1, q2 } = dynamics.torque
  return {
    device: {
      stability: landscape.stability, field: side * landscape.field[2],
      // Seen from the start the angle runs the other way where the moment starts antiparallel.
      torque: { q1, q2: side * q2 * dynamics.reference[2] }, fieldLike: device.damping * device.fieldLikeRatio,
    },
    pulse: { drive: reducedDrive, edge: tauRate * write.edge },
    tauRate, width: write.width, edge: write.edge,
  }
}

/**
 * Write error at each width (s, ascending, none shorter than the edge) without sampling error; what falls below
 * `LEAST_WRITE_ERROR` is 0.
 */
export function writeErrors({ device, pulse, tauRate }: CollinearProblem, widths: ArrayLike<number>, rule: FailureRule): Float64Array {
  return axialWriteErrors(device, pulse, Float64Array.from(widths, width => width * tauRate), rule).map(value => value < LEAST_WRITE_ERROR ? 0 : Math.min(1, value))
}

export interface WriteErrorCurve { width: number[], value: number[] }

/** Fewest and most times the asked width that a curve runs to. */
const REACH = { least: 1.25, most: 6 }
/** Smallest error that a curve shows. */
const CURVE_FLOOR = 1e-13

/**
 * Write error against width, from short pulses to where it leaves the figure or to some times the width that is asked for.
 * @param points number of widths, evenly spaced
 */
export function writeErrorCurve(collinear: CollinearProblem, rule: FailureRule, points: number): WriteErrorCurve {
  const { pulse, device, tauRate, width, edge } = collinear
  // The tail falls at about 2(i − 1) per unit of τ; see axial.ts for its source.
  const fall = 2 * Math.max(0.02, pulse.drive - 1 - device.field)
  const settled = (Math.log(4 * device.stability / CURVE_FLOOR) / fall + edge * tauRate) / tauRate
  const last = Math.min(REACH.most * width, Math.max(REACH.least * width, settled))
  const first = Math.max(edge, last / points)
  const widths = Array.from({ length: points }, (_, k) => first + (last - first) * k / (points - 1))
  return { width: widths, value: Array.from(writeErrors(collinear, widths, rule)) }
}

/** Width at which the error is the target, s, by interpolation of its logarithm; null where the curve does not reach it. */
export function widthForError({ width, value }: WriteErrorCurve, target: number): number | null {
  for (let k = 1; k < width.length; k++) {
    const [before, after] = [value[k - 1]!, value[k]!]
    if (!(before >= target && after < target)) continue
    if (after <= 0) return width[k]!
    const share = Math.log(target / before) / Math.log(after / before)
    return width[k - 1]! + share * (width[k]! - width[k - 1]!)
  }
  return null
}

/**
 * The linearised closed form 1 − exp[−(π²/4) Δ(i − 1)/(i e^{2(i−1)τ} − 1)] at widths in s (Butler et al., IEEE Trans. Magn. 48, 4684 (2012);
 * Khvalkovskiy et al., J. Phys. D 46, 074001 (2013), form from memory): the exponent is right, the factor before it is not.
 * Null where it does not hold: with a field, an angle-dependent torque, or at most the critical drive.
 */
export function closedFormError({ device, pulse, tauRate }: CollinearProblem, widths: readonly number[]): number[] | null {
  const i = pulse.drive
  if (!(i > 1) || device.field !== 0 || (device.torque?.q2 ?? 0) !== 0) return null
  return widths.map((width) => {
    const growth = i * Math.exp(2 * (i - 1) * width * tauRate) - 1
    return -Math.expm1(-(Math.PI ** 2 / 4) * device.stability * (i - 1) / growth)
  })
}
