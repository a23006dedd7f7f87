import type { SwitchingAnswer } from '../schemas/answer'
import type { JobSpec } from '../schemas/job'
import { LEVELS, levelMean, levelMiddle, levelOf, levelQuantile } from '../numerics/levels'
import { meanAndSpread } from '../numerics/statistics'
import { Junction } from './drive'
import { watchedSegments } from './path'
import type { Problem } from './problem'

/** Times at which all trials are looked at, at most. */
const MOST_TIMES = 97
/** Pieces into which the power is cut between two of them. */
const PARTS = 12

/** When the trials are looked at: after so many watched steps, and at what reduced time and drive that is. */
export interface EnsembleGrid { at: Int32Array, time: Float64Array, drive: Float64Array }

/** As even in time as the steps allow, the first and the last step included. */
export function ensembleGrid(spec: JobSpec, problem: Problem): EnsembleGrid {
  const segments = watchedSegments(spec, problem)
  const begin = segments[0]!.start
  const end = segments[segments.length - 1]!.end
  const at: number[] = []
  const time: number[] = []
  const drive: number[] = []
  let first = 0
  let wanted = 0
  for (const { start, end: until, from, to, steps } of segments) {
    const h = (until - start) / steps
    for (; wanted < MOST_TIMES; wanted++) {
      const t = begin + (end - begin) * wanted / (MOST_TIMES - 1)
      const step = Math.round((t - start) / h)
      if (step > steps || (step === steps && until < end)) break
      if (at.length > 0 && first + step <= at[at.length - 1]!) continue
      at.push(first + step)
      time.push(start + step * h)
      drive.push(from + (to - from) * step / steps)
    }
    first += steps
  }
  return { at: Int32Array.from(at), time: Float64Array.from(time), drive: Float64Array.from(drive) }
}

/**
 * Energy that a trial draws from the source, from what it looked like at the times of the grid: Σ_k E_k(cos θ_k) with
 * E_k(c) = ∫ hat_k(t) P(w(t), c) dt and hat_k the piecewise-linear function that is 1 at time k alone. J by level of cos θ.
 */
function energyTable(spec: JobSpec, problem: Problem, { time }: EnsembleGrid): Float64Array {
  const powers = powersByDrive(new Junction(spec, problem.numbers))
  const table = new Float64Array(time.length * LEVELS)
  const segments = watchedSegments(spec, problem)
  let segment = 0
  for (let k = 0; k + 1 < time.length; k++) {
    const cuts = [time[k]!, ...segments.map(s => s.end).filter(t => t > time[k]! && t < time[k + 1]!), time[k + 1]!]
    const span = time[k + 1]! - time[k]!
    for (let c = 0; c + 1 < cuts.length; c++) {
      const width = (cuts[c + 1]! - cuts[c]!) / PARTS
      for (let part = 0; part < PARTS; part++) {
        const t = cuts[c]! + (part + 0.5) * width
        while (segment + 1 < segments.length && t > segments[segment]!.end) segment++
        const { start, end, from, to } = segments[segment]!
        const power = powers(from + (to - from) * (t - start) / (end - start))
        const later = (t - time[k]!) / span
        for (let level = 0; level < LEVELS; level++) {
          const energy = power[level]! * width / problem.rate
          table[k * LEVELS + level]! += (1 - later) * energy
          table[(k + 1) * LEVELS + level]! += later * energy
        }
      }
    }
  }
  return table
}

/** Power in W by level of cos θ; a drive that stays is worked out once. */
function powersByDrive(junction: Junction): (drive: number) => Float64Array {
  let [last, power] = [NaN, new Float64Array(LEVELS)]
  return (drive) => {
    if (drive !== last) {
      const at = junction.powerOf(drive)
      power = power.map((_, level) => at(levelMiddle(level)))
      last = drive
    }
    return power
  }
}

/** What a chunk saw of its trials, one after the other. */
export class EnsembleObserver {
  readonly grid: EnsembleGrid
  /** level of m·e, and of cos θ where that is another number, by trial and time */
  private readonly along: Uint8Array
  private readonly cosines: Uint8Array | null
  private readonly energyOf: Float64Array
  /** J */
  readonly energy: Float32Array
  private sums: Float64Array
  /** trial of the chunk in the first lane */
  base = 0

  constructor(spec: JobSpec, private readonly problem: Problem, trials: number) {
    this.grid = ensembleGrid(spec, problem)
    this.along = new Uint8Array(trials * this.grid.at.length)
    this.cosines = this.tilted ? new Uint8Array(trials * this.grid.at.length) : null
    this.energyOf = energyTable(spec, problem, this.grid)
    this.energy = new Float32Array(trials)
    this.sums = new Float64Array(trials)
  }

  private get tilted(): boolean {
    return this.problem.dynamics.reference[2] !== 1
  }

  readonly see = (k: number, lane: number, x: number, y: number, z: number): void => {
    const { problem: { dynamics: { reference } }, grid, along, cosines } = this
    const trial = this.base + lane
    const cosine = x * reference[0] + y * reference[1] + z * reference[2]
    along[trial * grid.at.length + k] = levelOf(z)
    if (cosines) cosines[trial * grid.at.length + k] = levelOf(cosine)
    this.sums[trial]! += this.energyOf[k * LEVELS + levelOf(cosine)]!
    this.energy[trial] = this.sums[trial]!
  }

  /** In whichever form is smaller: the level of every trial, or how many trials were in each. */
  pack(): Record<string, Uint8Array | Uint32Array | Float32Array> {
    const { along, cosines, energy } = this
    return { energy, ...this.packed('along', along), ...(cosines ? this.packed('cosines', cosines) : {}) }
  }

  private packed(name: string, levels: Uint8Array): Record<string, Uint8Array | Uint32Array> {
    const times = this.grid.at.length
    if (levels.length <= 4 * times * LEVELS) return { [`${name}Levels`]: levels }
    const counts = new Uint32Array(times * LEVELS)
    addLevels(counts, levels, times)
    return { [`${name}Counts`]: counts }
  }
}

function addLevels(counts: Uint32Array, levels: ArrayLike<number>, times: number): void {
  for (let n = 0; n < levels.length; n++) counts[(n % times) * LEVELS + levels[n]!]! += 1
}

/** All chunks together. Integers alone are added, so that order and cut leave no trace. */
export interface Ensemble { along: Uint32Array, cosines: Uint32Array, energy: Float32Array }

/** @param parts arrays of the chunks in the order of their trials */
export function mergeEnsembles(parts: readonly Record<string, ArrayLike<number>>[], trials: number, times: number): Ensemble {
  const energy = new Float32Array(trials)
  let at = 0
  const total = (name: string) => {
    const counts = new Uint32Array(times * LEVELS)
    for (const part of parts) {
      const levels = part[`${name}Levels`]
      const own = part[`${name}Counts`]
      if (levels) addLevels(counts, levels, times)
      else if (own) for (let k = 0; k < counts.length; k++) counts[k]! += own[k]!
    }
    return counts
  }
  for (const { energy: own } of parts) {
    energy.set(own!, at)
    at += own!.length
  }
  const along = total('along')
  const tilted = parts.some(part => part.cosinesLevels ?? part.cosinesCounts)
  return { along, cosines: tilted ? total('cosines') : along, energy }
}

const tidy = (value: number) => Number(value.toPrecision(6))

/** Percentiles of m·e and of the resistance over time, and the energy, for the answer. */
export function ensembleAnswer(spec: JobSpec, problem: Problem, { along, cosines, energy }: Ensemble): Pick<SwitchingAnswer, 'ensemble' | 'energy'> {
  const grid = ensembleGrid(spec, problem)
  const junction = new Junction(spec, problem.numbers)
  const rows = Array.from(grid.time, (_, k) => k)
  const resistanceAt = rows.map((k) => {
    const { mean, half } = junction.working(grid.drive[k]!)
    return (cosine: number) => 1 / (mean + half * cosine)
  })
  const moment = (share: number) => rows.map(k => tidy(levelQuantile(along, k * LEVELS, share)))
  // Resistance falls as cos θ rises.
  const resistance = (share: number) => rows.map(k => tidy(resistanceAt[k]!(levelQuantile(cosines, k * LEVELS, 1 - share))))
  return {
    ensemble: {
      time: rows.map(k => tidy(grid.time[k]! / problem.rate)),
      moment: { low: moment(0.05), median: moment(0.5), high: moment(0.95), mean: rows.map(k => tidy(levelMean(along, k * LEVELS, z => z))) },
      resistance: { low: resistance(0.05), median: resistance(0.5), high: resistance(0.95), mean: rows.map(k => tidy(levelMean(cosines, k * LEVELS, resistanceAt[k]!))) },
    },
    energy: meanAndSpread(Float64Array.from(energy))?.mean ?? null,
  }
}
