import type { Dynamics, Segment } from './macrospin'
import { Rk4Stepper } from './macrospin'
import type { WellSampler } from './boltzmann'
import { exactExp } from './elementary'
import { STREAM, UniformStream } from './philox'

/** What happened in one trial. Times are reduced. */
export interface TrialOutcome {
  /** first time at which z·side reached 0 while watched; NaN when it did not */
  crossing: number
  /** on the starting side when watching ended */
  endsNear: boolean
  /** after the pulse the starting well was reached before the other */
  settlesNear: boolean
  /** neither well was reached before settling was given up */
  undecided: boolean
  steps: number
}

export interface TrialPlan {
  dynamics: Dynamics
  key: readonly [number, number]
  side: 1 | -1
  start: WellSampler
  watched: readonly Segment[]
  /** null: stop when watching ends. Otherwise relax without drive until z·side passes one of the two levels. */
  settling: { step: number, nearLevel: number, farLevel: number, longest: number } | null
}

/** Records m on an equidistant grid of reduced time, by linear interpolation between steps, brought back to the sphere. */
export class PathRecorder {
  private next = 0
  constructor(private readonly start: number, private readonly interval: number, private readonly samples: number) {}
  private target: Float32Array | null = null
  private offset = 0

  /** Writes the coming trial to `target` from `offset` on; null records nothing. */
  aim(target: Float32Array | null, offset = 0): void {
    this.target = target
    this.offset = offset
    this.next = 0
  }

  /** The step from (x0, y0, z0) at t0 to m at t1. */
  step(t0: number, t1: number, x0: number, y0: number, z0: number, m: Float64Array): void {
    const target = this.target
    if (target === null) return
    while (this.next < this.samples) {
      const t = this.start + this.next * this.interval
      if (t > t1 + 1e-9 * this.interval) return
      const f = Math.min(1, Math.max(0, (t - t0) / (t1 - t0)))
      const x = x0 + f * (m[0]! - x0)
      const y = y0 + f * (m[1]! - y0)
      const z = z0 + f * (m[2]! - z0)
      const scale = 1 / Math.sqrt(x * x + y * y + z * z)
      const at = this.offset + 3 * this.next
      target[at] = x * scale
      target[at + 1] = y * scale
      target[at + 2] = z * scale
      this.next++
    }
  }
}

/** Runs the trials of one plan, one after the other; a trial depends on its index alone. */
export class TrialRunner {
  private readonly stepper: Rk4Stepper
  private readonly starts: UniformStream
  private readonly crossings: UniformStream
  /** variance of z per reduced time at the equator */
  private readonly spreadRate: number

  constructor(private readonly plan: TrialPlan, private readonly recorder: PathRecorder | null = null) {
    this.stepper = new Rk4Stepper(plan.dynamics, plan.key)
    this.starts = new UniformStream(plan.key, STREAM.start)
    this.crossings = new UniformStream(plan.key, STREAM.crossing)
    this.spreadRate = plan.dynamics.noise * (1 + plan.dynamics.damping ** 2)
  }

  run(trial: number, outcome: TrialOutcome): void {
    const { plan, stepper, recorder, crossings } = this
    const { m } = stepper
    const { side } = plan
    stepper.restart(trial)
    this.starts.restart(trial)
    crossings.restart(trial)
    plan.start(this.starts, m)
    let crossing = NaN
    let crossed = false
    let steps = 0
    for (let n = 0; n < plan.watched.length; n++) {
      const segment = plan.watched[n]!
      const h = (segment.end - segment.start) / segment.steps
      const slope = (segment.to - segment.from) / segment.steps
      const spread = this.spreadRate * h
      for (let k = 0; k < segment.steps; k++) {
        const x0 = m[0]!
        const y0 = m[1]!
        const z0 = m[2]!
        const w0 = segment.from + k * slope
        stepper.drawNoise(h)
        stepper.step(h, w0, w0 + slope / 2, w0 + slope)
        const t0 = segment.start + k * h
        if (recorder !== null) recorder.step(t0, t0 + h, x0, y0, z0, m)
        if (!crossed) {
          const before = side * z0
          const after = side * m[2]!
          if (after <= 0) {
            crossed = true
            crossing = t0 + h * Math.max(0, before) / (Math.max(0, before) - after)
          }
          else {
            // A path that is near on both ends may have touched 0 in between: Brownian bridge.
            const exponent = 2 * before * after / spread
            if (exponent < 36 && crossings.next() < exactExp(-exponent)) {
              crossed = true
              crossing = t0 + h * before / (before + after)
            }
          }
        }
      }
      steps += segment.steps
    }
    outcome.crossing = crossing
    outcome.endsNear = side * m[2]! > 0
    outcome.undecided = false
    outcome.settlesNear = outcome.endsNear
    if (plan.settling !== null) {
      const { step, nearLevel, farLevel, longest } = plan.settling
      let left = longest
      while (side * m[2]! < nearLevel && -side * m[2]! < farLevel && left > 0) {
        stepper.drawNoise(step)
        stepper.step(step, 0, 0, 0)
        left--
      }
      steps += longest - left
      outcome.settlesNear = side * m[2]! >= nearLevel
      outcome.undecided = !outcome.settlesNear && -side * m[2]! < farLevel
    }
    outcome.steps = steps
    if (!Number.isFinite(m[0]! + m[1]! + m[2]!)) throw new RangeError(`the moment of trial ${trial} left the sphere`)
  }
}
