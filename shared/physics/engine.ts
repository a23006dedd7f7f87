import type { Answer, FailureAnswer, PathsLayout } from '../schemas/answer'
import type { JobSpec } from '../schemas/job'
import { LIMITS } from '../schemas/job'
import type { TrialOutcome } from '../numerics/trial'
import { LeftTheSphere, TrialRunner } from '../numerics/trial'
import { packArrays, unpackArrays } from '../utils/arrays'
import { toFilm } from './device'
import { ensembleGrid, EnsembleObserver, mergeEnsembles } from './ensemble'
import { PhysicsError, RunFailure } from './errors'
import { failureAnswer, planOfWidths, widthsOf } from './failure'
import type { WidthCount } from './failure'
import { ENGINE_VERSION, specHash, streamKey } from './identity'
import { motionAnswer, switchingAnswer } from './answers'
import { sampleGrid, watchedSegments } from './path'
import type { Problem } from './problem'
import { prepareProblem } from './problem'
import { thermalisingSteps, trialStart } from './start'
import type { Plan, Tally } from './tally'

export { ENGINE_VERSION, specHash }

/** Price on an installation that has not measured its own yet, s. */
export const DEFAULT_SECONDS_PER_TRIAL_STEP = 6e-8

/** Trials of a switching job whose paths are kept to be looked at. */
const KEPT_PATHS = 16
const MOST_SAMPLES = 2400
const CHUNK_SECONDS = 3
const MOST_TRIALS_PER_CHUNK = 32_768
const MOST_PATHS_PER_CHUNK = 24
/** Reduced time (units of 1/(α γ0 H_k)) after which a trial that has settled in neither well is given up. */
const LONGEST_SETTLING = 40

const trialsOf = ({ question }: JobSpec) => question.kind === 'motion' ? question.paths : question.trials

/** What a job will take. @throws PhysicsError where its numbers describe no run */
export function planJob(spec: JobSpec, problem: Problem = prepareProblem(spec)): Plan {
  if (spec.question.kind === 'failure') return planOfWidths(widthsOf(spec).map(part => planJob(part)))
  const thermalising = thermalisingSteps(spec, problem)
  if (thermalising > LIMITS.stepsPerTrial) throw new PhysicsError(['start', 'duration'], `Thermalising takes ${thermalising} steps a trial; at most ${LIMITS.stepsPerTrial} are done.`)
  const watched = watchedSegments(spec, problem).reduce((sum, segment) => sum + segment.steps, 0)
  if (watched > LIMITS.stepsPerTrial) throw new PhysicsError(['question', 'after'], `Watching takes ${watched} steps a trial; at most ${LIMITS.stepsPerTrial} are done.`)
  const settling = spec.question.kind === 'switching' ? expectedSettling(problem) : 0
  const stepsPerTrial = thermalising + watched + settling
  const trials = trialsOf(spec)
  return {
    trials, step: problem.step, phaseStep: problem.step * problem.largestFrequency, stepFrom: problem.stepFrom,
    stepsPerTrial, trialSteps: trials * stepsPerTrial,
  }
}

/** Mean steps from the end of the pulse until a well is reached: most trials end close to one, the rest fall from the equator. */
function expectedSettling(problem: Problem): number {
  const perTau = problem.rate / (problem.tauRate * problem.step * problem.rate)
  const width = problem.tauRate * (problem.pulse[problem.pulse.length - 1]!.end - problem.pulse[0]!.start) / problem.rate
  const typical = Math.log(4 * problem.numbers.stability) / (2 * Math.max(0.2, problem.reducedDrive - 1))
  const undecidedShare = Math.exp(-(((width - typical) / Math.max(0.5, typical)) ** 2))
  return perTau * 1.2 * undecidedShare
}

/** Predicted CPU-seconds of a job at a measured price of one step of one trial. */
export const priceJob = (spec: JobSpec, secondsPerTrialStep: number, plan: Plan = planJob(spec)): number =>
  plan.trialSteps * secondsPerTrialStep + 0.02

/** The job cut into pieces of about three predicted CPU-seconds, in order. What a trial does is independent of the cut. */
export function chunkJob(spec: JobSpec, secondsPerTrialStep: number, plan: Plan = planJob(spec)): { firstTrial: number, trialCount: number }[] {
  const { question } = spec
  if (question.kind === 'failure') {
    return widthsOf(spec).flatMap((part, k) => chunkJob(part, secondsPerTrialStep).map(({ firstTrial, trialCount }) => ({ firstTrial: k * question.trials + firstTrial, trialCount })))
  }
  const most = spec.question.kind === 'switching' ? MOST_TRIALS_PER_CHUNK : MOST_PATHS_PER_CHUNK
  const fit = Math.floor(CHUNK_SECONDS / (plan.stepsPerTrial * secondsPerTrialStep))
  const count = Math.ceil(plan.trials / Math.max(1, Math.min(most, fit)))
  const chunks = []
  for (let k = 0; k < count; k++) {
    const firstTrial = Math.floor(plan.trials * k / count)
    chunks.push({ firstTrial, trialCount: Math.floor(plan.trials * (k + 1) / count) - firstTrial })
  }
  return chunks
}

/** Layout of the kept paths when all of them have arrived. */
function pathsLayout(spec: JobSpec, problem: Problem): PathsLayout {
  const grid = sampleGrid(spec, problem, MOST_SAMPLES)
  return { paths: spec.question.kind === 'motion' ? spec.question.paths : Math.min(KEPT_PATHS, spec.question.trials), ...grid }
}

const FLAG_ENDS_NEAR = 1
const FLAG_SETTLES_NEAR = 2
const FLAG_UNDECIDED = 4

/** One chunk under way: call `advance` until `done === total`, then `finish`. */
export interface ChunkRun {
  readonly done: number
  readonly total: number
  /** Integrates the next few trials. */
  advance: () => void
  /** The chunk's partial result, packed. */
  finish: () => Uint8Array
}

/** Where in the space of parameters a run stands, for a failure to name. */
function regionOf(spec: JobSpec, problem: Problem): string {
  const { damping } = spec.device
  return [
    `α = ${damping}`, `Δ = ${problem.numbers.stability.toPrecision(3)}`, `i = ${problem.reducedDrive.toPrecision(3)}`,
    `T = ${spec.environment.temperature.toPrecision(4)} K`, `Δt = ${(problem.step * 1e12).toPrecision(3)} ps (ω·Δt = ${(problem.step * problem.largestFrequency).toPrecision(2)})`,
  ].join(', ')
}

/** @throws PhysicsError as `prepareProblem`; its `advance` throws RunFailure where a trial leaves the sphere */
export function openChunk(spec: JobSpec, firstTrial: number, trialCount: number): ChunkRun {
  if (spec.question.kind !== 'failure') return openTrials(spec, firstTrial, trialCount, { offset: 0, counts: false })
  const { trials } = spec.question
  const k = Math.floor(firstTrial / trials)
  const part = widthsOf(spec)[k]
  if (!part || firstTrial - k * trials + trialCount > trials) throw new RangeError('a chunk holds trials of one width')
  return openTrials(part, firstTrial - k * trials, trialCount, { offset: k * trials, counts: true })
}

/** @param as `offset`: of the trials' numbers in the job; `counts`: only how they end is of interest, neither paths nor the course of all */
function openTrials(spec: JobSpec, firstTrial: number, trialCount: number, as: { offset: number, counts: boolean }): ChunkRun {
  const problem = prepareProblem(spec)
  const layout = as.counts ? { ...pathsLayout(spec, problem), paths: 0 } : pathsLayout(spec, problem)
  const switching = spec.question.kind === 'switching'
  const settlingStep = problem.step * problem.rate
  const grid = { start: layout.start * problem.rate, interval: layout.interval * problem.rate, samples: layout.samples }
  const observer = switching && !as.counts ? new EnsembleObserver(spec, problem, trialCount) : null
  const runner = new TrialRunner({
    dynamics: problem.dynamics,
    key: streamKey(spec),
    side: problem.side,
    ...trialStart(spec, problem),
    watched: watchedSegments(spec, problem),
    observe: observer && { at: observer.grid.at, see: observer.see },
    settling: switching
      ? { step: settlingStep, nearLevel: 0.9 * Math.abs(problem.nearWell[2]), farLevel: 0.9 * Math.abs(problem.farWell[2]), longest: Math.ceil(LONGEST_SETTLING / (spec.device.damping * settlingStep)) }
      : null,
  })
  const times = new Float64Array(trialCount)
  const flags = new Uint8Array(trialCount)
  const kept = Math.max(0, Math.min(layout.paths, firstTrial + trialCount) - firstTrial)
  const paths = new Float32Array(kept * layout.samples * 3)
  const outcomes = Array.from({ length: runner.lanes }, (): TrialOutcome => ({ crossing: NaN, endsNear: true, settlesNear: true, undecided: false, steps: 0 }))
  let done = 0
  let trialSteps = 0
  return {
    get done() { return done },
    total: trialCount,
    advance() {
      // Kept and unkept trials go apart: recording looks at every step.
      const left = done < kept ? kept - done : trialCount - done
      const group = outcomes.slice(0, Math.min(runner.lanes, left))
      if (observer) observer.base = done
      try {
        runner.run(firstTrial + done, group, done < kept ? { grid, target: paths, offset: done * layout.samples * 3 } : null)
      }
      catch (error) {
        if (error instanceof LeftTheSphere) throw new RunFailure(error.trial, regionOf(spec, problem))
        throw error
      }
      for (const outcome of group) {
        times[done] = outcome.crossing / problem.rate
        flags[done] = (outcome.endsNear ? FLAG_ENDS_NEAR : 0) | (outcome.settlesNear ? FLAG_SETTLES_NEAR : 0) | (outcome.undecided ? FLAG_UNDECIDED : 0)
        trialSteps += outcome.steps
        done++
      }
    },
    finish() {
      toFilm(problem.easyAxis, paths)
      return packArrays({ engineVersion: ENGINE_VERSION, firstTrial: firstTrial + as.offset, trialCount, trialSteps }, { times, flags, paths, ...observer?.pack() })
    },
  }
}

interface PartMeta { engineVersion: string, firstTrial: number, trialCount: number, trialSteps: number }

/** One trial of a partial result: its number, when it crossed the equator (s, NaN: never) and how it ended. */
export interface TrialRecord { trial: number, crossing: number, endsNear: boolean, settlesNear: boolean, undecided: boolean }

/** The trials of one partial result, in order. */
export function* trialRecords(part: Uint8Array): Generator<TrialRecord> {
  const { meta, arrays } = unpackArrays(part)
  const { firstTrial } = meta as PartMeta
  const flags = arrays.flags!
  for (const [k, crossing] of arrays.times!.entries()) {
    const flag = flags[k]!
    yield {
      trial: firstTrial + k, crossing,
      endsNear: (flag & FLAG_ENDS_NEAR) !== 0, settlesNear: (flag & FLAG_SETTLES_NEAR) !== 0, undecided: (flag & FLAG_UNDECIDED) !== 0,
    }
  }
}

/**
 * Puts partial results together, in the order of their first trial. All of them give the same bytes whatever the cut was; some of
 * them give an answer with `complete: false`.
 * @throws Error where a part is from another engine version
 */
export function mergeChunks(spec: JobSpec, parts: readonly Uint8Array[]): { answer: Answer, paths: Float32Array } {
  const problem = prepareProblem(spec)
  const plan = planJob(spec, problem)
  const layout = pathsLayout(spec, problem)
  const opened = parts.map((part) => {
    const { meta, arrays } = unpackArrays(part)
    return { meta: meta as PartMeta, arrays }
  }).sort((a, b) => a.meta.firstTrial - b.meta.firstTrial)
  const foreign = opened.find(part => part.meta.engineVersion !== ENGINE_VERSION)
  if (foreign) throw new Error(`a partial result is from engine ${foreign.meta.engineVersion}, this is ${ENGINE_VERSION}`)
  if (spec.question.kind === 'failure') return { answer: failureOf(spec, problem, plan, opened), paths: new Float32Array(0) }
  const trials = opened.reduce((sum, part) => sum + part.meta.trialCount, 0)
  const times = new Float64Array(trials)
  const flags = new Uint8Array(trials)
  const keptLengths = opened.reduce((sum, part) => sum + part.arrays.paths!.length, 0)
  const paths = new Float32Array(keptLengths)
  let at = 0
  let pathAt = 0
  for (const part of opened) {
    times.set(part.arrays.times as Float64Array, at)
    flags.set(part.arrays.flags as Uint8Array, at)
    paths.set(part.arrays.paths as Float32Array, pathAt)
    at += part.meta.trialCount
    pathAt += part.arrays.paths!.length
  }
  const count = (flag: number) => flags.reduce((sum, f) => sum + ((f & flag) === 0 ? 0 : 1), 0)
  const undecided = count(FLAG_UNDECIDED)
  const tally: Tally = {
    trials, times, paths, undecided,
    trialSteps: opened.reduce((sum, part) => sum + part.meta.trialSteps, 0),
    endsNear: count(FLAG_ENDS_NEAR),
    settlesNear: count(FLAG_SETTLES_NEAR) + undecided,
    endsFlags: flags.map(f => f & FLAG_ENDS_NEAR),
    ensemble: spec.question.kind === 'switching' ? mergeEnsembles(opened.map(part => part.arrays), trials, ensembleGrid(spec, problem).at.length) : null,
  }
  const context = { spec, problem, plan, tally, layout: { ...layout, paths: paths.length / (3 * layout.samples) }, complete: trials === plan.trials }
  return { answer: spec.question.kind === 'switching' ? switchingAnswer(context) : motionAnswer(context), paths }
}

/** The answer about widths from the flags of their trials, one count for each width of which there are any. */
function failureOf(spec: JobSpec, problem: Problem, plan: Plan, opened: readonly { meta: PartMeta, arrays: ReturnType<typeof unpackArrays>['arrays'] }[]): FailureAnswer {
  const perWidth = trialsOf(spec)
  const counts = new Map<number, WidthCount>()
  let trialSteps = 0
  for (const { meta, arrays } of opened) {
    const k = Math.floor(meta.firstTrial / perWidth)
    const count = counts.get(k) ?? { trials: 0, endsNear: 0, settlesNear: 0, undecided: 0, uncrossed: 0 }
    counts.set(k, count)
    count.trials += meta.trialCount
    trialSteps += meta.trialSteps
    const flags = arrays.flags!
    for (const [trial, crossing] of arrays.times!.entries()) {
      const flag = flags[trial]!
      if ((flag & FLAG_ENDS_NEAR) !== 0) count.endsNear++
      if ((flag & FLAG_UNDECIDED) !== 0) count.undecided++
      if ((flag & (FLAG_SETTLES_NEAR | FLAG_UNDECIDED)) !== 0) count.settlesNear++
      if (Number.isNaN(crossing)) count.uncrossed++
    }
  }
  return failureAnswer({ spec, problem, plan, trialSteps, counts })
}
