import type { Kernel } from '../kernels/loader'
import { openKernel } from '../kernels/loader'
import type { Dynamics, Segment } from './macrospin'
import { responseOf, STAGE, STAGE_LENGTH } from './macrospin'
import type { WellSampler } from './boltzmann'
import { philox, STREAM, UniformStream } from './philox'

/** The moment of a trial is no unit vector any more: NaN, or a field too large for the step. */
export class LeftTheSphere extends RangeError {
  constructor(readonly trial: number) {
    super(`trial ${trial} left the sphere`)
    this.name = 'LeftTheSphere'
  }
}

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
  /** integration steps that this trial needed */
  steps: number
}

export interface TrialPlan {
  dynamics: Dynamics
  key: readonly [number, number]
  side: 1 | -1
  start: WellSampler
  /** undriven time before watching begins: thermalises what `start` gives */
  before?: { span: number, steps: number } | null
  watched: readonly Segment[]
  /** looks at every trial when so many watched steps are done; numbers ascending, 0 is the start */
  observe?: { at: ArrayLike<number>, see: (k: number, lane: number, x: number, y: number, z: number) => void } | null
  /** null: stop when watching ends. Otherwise relax without drive until z·side passes one of the two levels. */
  settling: { step: number, nearLevel: number, farLevel: number, longest: number } | null
}

/** Where m is recorded: an equidistant grid of reduced time, by linear interpolation between steps, brought back to the sphere. */
export interface PathGrid { start: number, interval: number, samples: number }

/** 32-bit places in the kernel's memory; lane arrays are four apart. */
const PLACE = { x: 0, y: 4, z: 8, state: 12, crossStep: 28, crossFraction: 32, trial: 36, decision: 40, parameters: 48, key: 64, table: 1024 } as const
/** Length of a stage's row in the kernel's table, see ROW there. */
const ROW = 12
/** Byte address of the row of the undriven moment; the rows of the waveform follow. */
const REST = PLACE.table * 4
const LANE_STRIDE = 4
/** Steps between two looks at the clock, at most: some milliseconds. */
const SLICE = 50_000

/** `table`: byte address of its rows. */
interface Stretch { segment: Segment, h: number, first: number, moving: boolean, table: number }

const stagesOf = (segment: Segment) => segment.from === segment.to ? 1 : 2 * segment.steps + 1

/**
 * Runs trials of one plan in the kernel, as many at once as it has lanes. What a trial does depends on its index and the key alone:
 * its start and its crossings come from Philox counters, its noise from xoshiro128++ seeded by one.
 */
export class TrialRunner {
  private readonly f32: Float32Array
  private readonly i32: Int32Array
  private readonly u32: Uint32Array
  private readonly starts: UniformStream
  private readonly seed = new Uint32Array(4)
  private readonly m = new Float64Array(3)
  private readonly stretches: Stretch[]
  private readonly row = new Float64Array(STAGE_LENGTH)
  private readonly angular: boolean
  private observed = 0

  constructor(private readonly plan: TrialPlan, private readonly kernel: Kernel = openKernel()) {
    const { dynamics, key, side, watched } = plan
    this.starts = new UniformStream(key, STREAM.start)
    let first = 0
    let table = REST + ROW * 4
    this.stretches = watched.map((segment) => {
      const stretch = { segment, h: (segment.end - segment.start) / segment.steps, first, moving: segment.from !== segment.to, table }
      first += segment.steps
      table += stagesOf(segment) * ROW * 4
      return stretch
    })
    const missing = Math.ceil((table - kernel.memory.buffer.byteLength) / 65536)
    if (missing > 0) kernel.memory.grow(missing)
    this.f32 = new Float32Array(kernel.memory.buffer)
    this.i32 = new Int32Array(kernel.memory.buffer)
    this.u32 = new Uint32Array(kernel.memory.buffer)
    this.angular = [0, ...watched.flatMap(s => [s.from, s.to])].some(drive => this.dependsOnAngle(drive))
    this.f32.set([
      dynamics.damping, 0, 0, 0, ...dynamics.field, ...dynamics.reference, 0, this.angular ? 1 : 0, dynamics.fieldLikeRatio, side,
      plan.settling?.nearLevel ?? 2, plan.settling?.farLevel ?? 2,
    ], PLACE.parameters)
    this.u32.set(key, PLACE.key)
    for (const stretch of this.stretches) this.prepare(stretch)
  }

  private dependsOnAngle(drive: number): boolean {
    const { row } = this
    responseOf(this.plan.dynamics)(drive, row)
    return row[STAGE.q2] !== 0 || row[STAGE.r1] !== 0 || row[STAGE.r2] !== 0
  }

  /** Writes the rows of every stage of a stretch. */
  private prepare({ segment, h, moving, table }: Stretch): void {
    const stages = stagesOf(segment)
    for (let stage = 0; stage < stages; stage++) {
      const drive = moving ? segment.from + (segment.to - segment.from) * stage / (stages - 1) : segment.from
      this.writeRow(table / 4 + ROW * stage, drive, h)
    }
  }

  /** Writes one row; `place` in 32-bit places. A part of D that is the same along all axes exerts no torque. */
  private writeRow(place: number, drive: number, h: number): void {
    const { f32, row, plan: { dynamics }, angular } = this
    responseOf(dynamics)(drive, row)
    const a = row[STAGE.a]!
    const q1 = row[STAGE.q1]!
    f32[place] = angular ? a : a / q1
    f32[place + 1] = angular ? row[STAGE.c]! : dynamics.fieldLikeRatio * a / q1 + row[STAGE.c]!
    f32[place + 2] = row[STAGE.y]! - row[STAGE.x]!
    f32[place + 3] = row[STAGE.z]! - row[STAGE.x]!
    f32[place + 4] = Math.sqrt(row[STAGE.noise]! / h)
    f32[place + 5] = row[STAGE.noise]! * (1 + dynamics.damping ** 2) * h
    for (let k = 0; k < 4; k++) f32[place + 6 + k] = row[STAGE.q1 + k]!
  }

  get lanes(): number {
    return this.kernel.lanes
  }

  /**
   * Runs the trials `first` … `first + outcomes.length − 1`, at most one a lane.
   * @param record when given, every trial's path is written to `target`, one after the other from `offset` on
   * @throws LeftTheSphere
   */
  run(first: number, outcomes: TrialOutcome[], record: { grid: PathGrid, target: Float32Array, offset: number } | null = null): void {
    const { plan, i32, f32, kernel } = this
    const used = outcomes.length
    if (used > kernel.lanes) throw new RangeError('more trials than lanes')
    for (let lane = 0; lane < kernel.lanes; lane++) this.begin(lane, first + lane, lane < used)
    if (plan.before) this.rest(plan.before.steps, plan.before.span / plan.before.steps)
    const next = new Array<number>(used).fill(0)
    this.observed = 0
    this.look(0, used)
    for (const stretch of this.stretches) this.watch(stretch, record, next)
    for (const [lane, outcome] of outcomes.entries()) {
      const step = i32[PLACE.crossStep + lane]!
      outcome.crossing = step < 0 ? NaN : this.timeOf(step, f32[PLACE.crossFraction + lane]!)
      outcome.endsNear = plan.side * f32[PLACE.z + lane]! > 0
      outcome.settlesNear = outcome.endsNear
      outcome.undecided = false
      outcome.steps = this.watchedSteps
    }
    if (plan.settling !== null) this.settle(plan.settling, outcomes)
    for (let lane = 0; lane < used; lane++) {
      const norm = Math.hypot(f32[PLACE.x + lane]!, f32[PLACE.y + lane]!, f32[PLACE.z + lane]!)
      if (!(Math.abs(norm - 1) < 1e-3)) throw new LeftTheSphere(first + lane)
    }
  }

  /** Steps before settling. */
  private get watchedSteps(): number {
    const last = this.stretches[this.stretches.length - 1]!
    return (this.plan.before?.steps ?? 0) + last.first + last.segment.steps
  }

  private begin(lane: number, trial: number, used: boolean): void {
    const { f32, i32, u32, m, seed, plan } = this
    this.starts.restart(trial)
    plan.start(this.starts, m)
    for (let axis = 0; axis < 3; axis++) f32[PLACE.x + LANE_STRIDE * axis + lane] = m[axis]!
    philox(0, STREAM.noise, trial, 0, plan.key[0], plan.key[1], seed)
    for (let word = 0; word < 4; word++) u32[PLACE.state + LANE_STRIDE * word + lane] = seed[word]!
    i32[PLACE.crossStep + lane] = used ? -1 : 0
    f32[PLACE.crossFraction + lane] = 0
    u32[PLACE.trial + lane] = trial
    i32[PLACE.decision + lane] = used ? 0 : 2
  }

  private watch({ segment, h, first, moving, table }: Stretch, record: { grid: PathGrid, target: Float32Array, offset: number } | null, next: number[]): void {
    const { kernel, plan: { observe } } = this
    const slice = record === null ? SLICE : 1
    for (let k = 0, to = 0; k < segment.steps; k = to) {
      to = Math.min(segment.steps, k + slice, observe && this.observed < observe.at.length ? Math.max(k + 1, observe.at[this.observed]! - first) : Infinity)
      if (record === null) kernel.steps(k, to, h, 1, table, moving ? 1 : 0, first, 0)
      else {
        const before = this.f32.slice(0, PLACE.state)
        kernel.steps(k, to, h, 1, table, moving ? 1 : 0, first, 0)
        for (let lane = 0; lane < next.length; lane++) this.recordStep(lane, segment.start + k * h, h, before, record, next)
      }
      this.look(first + to, next.length)
    }
  }

  /** Shows the lanes in use to the observer where it wants to see them after so many steps. */
  private look(steps: number, used: number): void {
    const { plan: { observe }, f32 } = this
    if (!observe) return
    for (; this.observed < observe.at.length && observe.at[this.observed]! <= steps; this.observed++) {
      for (let lane = 0; lane < used; lane++) observe.see(this.observed, lane, f32[PLACE.x + lane]!, f32[PLACE.y + lane]!, f32[PLACE.z + lane]!)
    }
  }

  /** Goes on without drive. */
  private rest(steps: number, h: number): void {
    this.writeRow(REST / 4, 0, h)
    for (let k = 0; k < steps; k += SLICE) this.kernel.steps(k, Math.min(steps, k + SLICE), h, 0, REST, 0, 0, 0)
  }

  private recordStep(lane: number, t0: number, h: number, before: Float32Array, { grid, target, offset }: { grid: PathGrid, target: Float32Array, offset: number }, next: number[]): void {
    const place = offset + 3 * grid.samples * lane
    while (next[lane]! < grid.samples) {
      const t = grid.start + next[lane]! * grid.interval
      if (t > t0 + h + 1e-9 * grid.interval) return
      const f = Math.min(1, Math.max(0, (t - t0) / h))
      const [x, y, z] = [PLACE.x, PLACE.y, PLACE.z].map(at => before[at + lane]! + f * (this.f32[at + lane]! - before[at + lane]!)) as [number, number, number]
      const scale = 1 / Math.sqrt(x * x + y * y + z * z)
      target.set([x * scale, y * scale, z * scale], place + 3 * next[lane]!)
      next[lane]! += 1
    }
  }

  private settle({ step, longest }: NonNullable<TrialPlan['settling']>, outcomes: TrialOutcome[]): void {
    const { kernel, i32, f32, plan } = this
    this.writeRow(REST / 4, 0, step)
    for (const [lane, outcome] of outcomes.entries()) {
      const z = plan.side * f32[PLACE.z + lane]!
      if (z > f32[PLACE.parameters + 14]!) i32[PLACE.decision + lane] = 1
      else if (-z > f32[PLACE.parameters + 15]!) i32[PLACE.decision + lane] = 2
      outcome.undecided = i32[PLACE.decision + lane] === 0
    }
    const open = () => outcomes.some((_, lane) => i32[PLACE.decision + lane] === 0)
    for (let k = 0; k < longest && open(); k += SLICE) kernel.steps(k, Math.min(longest, k + SLICE), step, 0, REST, 0, 0, 1)
    for (const [lane, outcome] of outcomes.entries()) {
      const decision = i32[PLACE.decision + lane]!
      const stepsTaken = outcome.undecided ? (decision === 0 ? longest : decision >> 1) : 0
      outcome.settlesNear = (decision & 1) === 1
      outcome.undecided = decision === 0
      outcome.steps += stepsTaken
    }
  }

  /** Reduced time of a crossing `fraction` of a step after the start of the watched step `step`. */
  private timeOf(step: number, fraction: number): number {
    const stretch = this.stretches.findLast(s => s.first <= step)!
    return stretch.segment.start + (step - stretch.first + fraction) * stretch.h
  }
}
