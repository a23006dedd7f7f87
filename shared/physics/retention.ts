import type { JobSpec } from '../schemas/job'
import { axialEscapeRate } from '../numerics/escape'
import { BOLTZMANN } from './constants'
import { diametersOf } from './device'
import type { Problem } from './problem'

/** 365.25 days in seconds. */
export const YEAR = 365.25 * 86_400
/** Attempts per second of a reversal whose dynamics is not modelled: an assumption of the trade, not a result. */
export const ASSUMED_PREFACTOR = 1e9

/** Diameter above which a wall costs less than turning as one, and the barrier of that wall in kB T. */
export function wallNumbers(spec: JobSpec, problem: Problem): { crossoverDiameter: number, wallBarrier: number } {
  const { device, environment } = spec
  const energy = problem.numbers.anisotropyEnergy
  return {
    crossoverDiameter: 16 / Math.PI * Math.sqrt(device.exchangeStiffness / energy),
    wallBarrier: 4 * Math.sqrt(device.exchangeStiffness * energy) * diametersOf(device)[1] * device.thickness / (BOLTZMANN * environment.temperature),
  }
}

/** Above this a rate is beyond double precision, and beyond any interest. */
const HIGHEST_BARRIER = 300

/** How the state at the start gets lost by heat alone. */
export interface Retention {
  /** per second, of one cell */
  rate: number
  /** barrier that decides, kB T */
  barrier: number
  by: 'turning' | 'wall'
  /** whether the attempt rate is the assumed one */
  assumed: boolean
}

/**
 * Escape of the starting state at the job's temperature and field, over the smaller of the two barriers. Turning as one in an axial
 * landscape is exact; everything else takes the assumed prefactor.
 */
export function retention(spec: JobSpec, problem: Problem): Retention {
  const { wallBarrier } = wallNumbers(spec, problem)
  const { numbers: { stability }, dynamics: { field }, stiffnesses: [first, second], side, tauRate } = problem
  const hold = side * field[2]
  const turning = stability * (1 + Math.min(0.999, Math.max(-0.999, hold))) ** 2
  if (wallBarrier < turning) return { rate: ASSUMED_PREFACTOR * Math.exp(-wallBarrier), barrier: wallBarrier, by: 'wall', assumed: true }
  const axial = first === second && field[0] === 0 && field[1] === 0
  const exact = axial && turning < HIGHEST_BARRIER ? axialEscapeRate({ stability, field: hold }) : null
  return exact !== null
    ? { rate: tauRate * exact, barrier: turning, by: 'turning', assumed: false }
    : { rate: ASSUMED_PREFACTOR * Math.exp(-turning), barrier: turning, by: 'turning', assumed: true }
}

/** Probability that a cell is lost within a time, s. */
export const lossWithin = (rate: number, time: number) => -Math.expm1(-rate * time)

/** Failures per 10⁹ hours of one cell. */
export const failuresInTime = (rate: number) => rate * 3600 * 1e9

/**
 * Barrier in kB T that keeps an array: P = 1 − exp(−N f t e^−Δ).
 * @param cells number of cells, N
 * @param time s
 * @param allowed probability that the array has lost a cell
 * @param prefactor f, 1/s
 */
export const stabilityNeeded = (cells: number, time: number, allowed: number, prefactor: number) =>
  Math.log(prefactor * time * cells / -Math.log1p(-allowed))

/** Mean factor by which a spread of Δ (normal, standard deviation σ) multiplies e^−Δ: e^(−μ + σ²/2) over e^−μ. */
export const spreadFactor = (deviation: number) => Math.exp(deviation * deviation / 2)

/**
 * Largest field of the eight nearest neighbours along the easy axis, A/m, by point dipoles at the pitch: the worst data pattern gives its
 * negative, the best its positive value.
 */
export function neighbourField(moment: number, pitch: number, easyAxis: 'z' | 'x'): number {
  let sum = 0
  for (const x of [-1, 0, 1]) {
    for (const y of [-1, 0, 1]) {
      const square = x * x + y * y
      if (square > 0) sum += Math.abs((easyAxis === 'z' ? -1 : 3 * x * x / square - 1) / square ** 1.5)
    }
  }
  return moment * sum / (4 * Math.PI * pitch ** 3)
}
