import { Solver } from 'odex'
import type { DeterministicPath } from '../schemas/answer'
import type { JobSpec } from '../schemas/job'
import { driftOf } from '../numerics/macrospin'
import type { Segment } from '../numerics/macrospin'
import { toFilm } from './device'
import type { Problem } from './problem'
import { prepareProblem } from './problem'
import { quietStart } from './start'

const TOLERANCE = 1e-11
/** Samples for one turn of the precession: what the eye can use. */
const SAMPLES_PER_TURN = 24

/** Stretches that are watched: the pulse and, for the question of motion, the time after it. Reduced time. */
export function watchedSegments(spec: JobSpec, problem: Problem): Segment[] {
  const end = problem.pulse[problem.pulse.length - 1]!.end
  const after = spec.question.kind === 'motion' ? spec.question.after * problem.rate : 0
  if (!(after > 0)) return problem.pulse
  const steps = Math.max(1, Math.ceil(after / (problem.step * problem.rate)))
  return [...problem.pulse, { start: end, end: end + after, from: 0, to: 0, steps }]
}

/** An equidistant grid over the watched time, s, fine enough to draw the precession but never more than `most` samples. */
export function sampleGrid(spec: JobSpec, problem: Problem, most: number): { start: number, interval: number, samples: number } {
  const watched = watchedSegments(spec, problem)
  const start = watched[0]!.start / problem.rate
  const span = watched[watched.length - 1]!.end / problem.rate - start
  const turns = span * problem.rate * Math.max(1, Math.sqrt(problem.stiffnesses[0] * problem.stiffnesses[1])) / (2 * Math.PI)
  const samples = Math.min(most, Math.max(240, Math.ceil(turns * SAMPLES_PER_TURN) + 1))
  return { start, interval: span / (samples - 1), samples }
}

/**
 * The path without noise, from the rms angle of the zero-drive well at φ = 0 or the fixed angle of all trials, by the extrapolation method of `odex`
 * (tolerance 1e-11, dense output), each linear piece of the waveform on its own.
 * @param most largest number of samples returned
 * @throws PhysicsError as `prepareProblem`
 */
export function deterministicPath(spec: JobSpec, most = 3000, problem: Problem = prepareProblem(spec)): DeterministicPath {
  const grid = sampleGrid(spec, problem, most)
  const { m: from, angle: startAngle } = quietStart(spec, problem)
  let m: number[] = from
  const drift = driftOf(problem.dynamics)
  const time: number[] = []
  const values: number[] = []
  let crossing: number | null = null
  const { side, rate } = problem
  const watched = watchedSegments(spec, problem)
  const put = (t: number, v: readonly number[]) => {
    const norm = Math.hypot(v[0]!, v[1]!, v[2]!)
    time.push(Number(t.toPrecision(7)))
    for (const c of v) values.push(Number((c / norm).toFixed(6)))
  }
  for (const [index, segment] of watched.entries()) {
    const solver = new Solver(3)
    solver.denseOutput = true
    solver.absoluteTolerance = TOLERANCE
    solver.relativeTolerance = TOLERANCE
    solver.maxSteps = 1_000_000
    solver.initialStepSize = Math.min(0.1, (segment.end - segment.start) / 4)
    const slope = (segment.to - segment.from) / (segment.end - segment.start)
    const isLast = index === watched.length - 1
    const out = [0, 0, 0]
    let previous = side * m[2]!
    const result = solver.solve((s, y) => {
      // Trial steps that are far too long leave the sphere; there only the direction counts, so that nothing runs away.
      const size = Math.hypot(y[0]!, y[1]!, y[2]!)
      drift([y[0]! / size, y[1]! / size, y[2]! / size], segment.from + slope * (s - segment.start), out)
      return out.slice()
    }, segment.start, m, segment.end, (_n, sOld, s, y, dense) => {
      if (crossing === null && previous > 0 && side * y[2]! <= 0) crossing = bisect(sOld, s, t => side * dense(2, t)) / rate
      previous = side * y[2]!
      for (let k = time.length; k < grid.samples; k++) {
        const t = grid.start + k * grid.interval
        const at = t * rate
        if (at > s && !(isLast && s >= segment.end - 1e-9 * Math.abs(segment.end) && k === grid.samples - 1)) break
        const inside = Math.min(at, s)
        put(t, inside >= s || s === sOld ? [y[0]!, y[1]!, y[2]!] : [dense(0, inside), dense(1, inside), dense(2, inside)])
      }
      return undefined
    })
    const norm = Math.hypot(result.y[0]!, result.y[1]!, result.y[2]!)
    m = result.y.map(c => c / norm)
  }
  toFilm(problem.easyAxis, values)
  return { startAngle, time, m: values, crossing, endsFar: side * m[2]! < 0 }
}

/** Root of a function that is positive at `low` and not at `high`. */
function bisect(low: number, high: number, f: (x: number) => number): number {
  for (let n = 0; n < 60; n++) {
    const middle = (low + high) / 2
    if (f(middle) > 0) low = middle
    else high = middle
  }
  return (low + high) / 2
}
