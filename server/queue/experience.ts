import { normalQuantile } from '#shared/numerics/normal'
import { missOf } from './outlook'
import type { Bounds, BoundsAt, Pace } from './outlook'

// What past chunks and past predictions teach about the coming ones.

/** One chunk that was done: its price, what it used and how long it took. */
export interface DoneChunk { priceMicros: number, cpuMicros: number, wallSeconds: number }

/** Spread assumed before anything is known, in natural logarithms. */
const UNKNOWN = 0.3
/** Chunks that the assumption counts for. */
const ASSUMED = 3
/** CPU seconds below which the clock's coarseness and the start of a chunk show in its time. */
const START_SECONDS = 0.02

/** The pace of the chunks given; of few, mixed with an assumption. */
export function paceOfChunks(chunks: readonly DoneChunk[]): Pace {
  const sound = chunks.filter(({ priceMicros, cpuMicros, wallSeconds }) => priceMicros > 0 && cpuMicros > 0 && wallSeconds > 0)
  return {
    use: moments(sound.map(({ priceMicros, cpuMicros }) => Math.log(cpuMicros / priceMicros))),
    stretch: moments(sound.map(({ cpuMicros, wallSeconds }) => Math.log(Math.max(1, wallSeconds / (cpuMicros / 1e6 + START_SECONDS))))),
  }
}

function moments(values: readonly number[]): { mean: number, sd: number } {
  const n = values.length
  const mean = values.reduce((sum, value) => sum + value, 0) / (n + ASSUMED)
  const squares = values.reduce((sum, value) => sum + (value - mean) ** 2, 0)
  return { mean, sd: Math.sqrt((squares + ASSUMED * UNKNOWN ** 2) / (n + ASSUMED)) }
}

/** A prediction whose job has ended. Seconds. */
export interface Scored { stage: number, median: number, spread: number, actual: number }

/** Share of the ends that is to lie in the range. */
export const COVERAGE = 0.8
/** Misses that are assumed before there are any of this installation's own, of a normal spread somewhat wider than stated. */
const ASSUMED_MISSES = 20
const assumedMisses = (count: number): number[] => Array.from({ length: count }, (_, k) => 1.25 * normalQuantile((k + 0.5) / count))

/** Ends count as about as far away up to this factor; of those the latest, this many. */
const NEAR_FACTOR = 3
const NEAR_COUNT = 100

/** Bounds between which four of five of the past misses lie; the fewer there are, the more assumed ones are counted in. `scored`: the latest first. */
export function boundsOf(scored: readonly Scored[]): Bounds {
  const of = (some: readonly Scored[]): BoundsAt => {
    const known = new Map<number, readonly [number, number]>()
    return (median) => {
      // Half a factor more or less asks the same past.
      const rung = Math.round(2 * Math.log(median + 1))
      const bounds = known.get(rung) ?? boundsNear(some, Math.exp(rung / 2) - 1)
      known.set(rung, bounds)
      return bounds
    }
  }
  return { queued: of(scored.filter(({ stage }) => stage === 0)), running: of(scored.filter(({ stage }) => stage > 0)) }
}

/** What short jobs miss by on a busy machine says little of long ones, so that only those of the same length are asked. */
function boundsNear(scored: readonly Scored[], median: number): readonly [number, number] {
  const near = scored.filter(past => Math.abs(Math.log((past.median + 1) / (median + 1))) <= Math.log(NEAR_FACTOR)).slice(0, NEAR_COUNT)
  const assumed = Math.max(0, ASSUMED_MISSES - Math.floor(near.length / 3))
  const misses = [...assumedMisses(assumed), ...near.map(({ actual, median, spread }) => missOf(actual, median, spread))].sort((a, b) => a - b)
  // One place further out on either side than the plain quantile: the next miss is none of these.
  const out = Math.max(0, Math.floor((misses.length + 1) * (1 - COVERAGE) / 2) - 1)
  return [misses[out]!, misses[misses.length - 1 - out]!]
}

/** Stage of a job's life at which a prediction is kept: 0 while it waits, then 1 to 10 for the tenths of its work. */
export const stageOf = (queued: boolean, progress: number): number => queued ? 0 : Math.min(10, 1 + Math.floor(progress * 10))
