import type { MotionAnswer, PathsLayout, RunRecord, SwitchingAnswer } from '../schemas/answer'
import type { JobSpec } from '../schemas/job'
import { meanAndSpread, orderQuantile, proportion, wilson } from '../numerics/statistics'
import { agreement } from './agreement'
import { cautions } from './cautions'
import { ensembleAnswer } from './ensemble'
import { ENGINE_VERSION, specHash } from './identity'
import { deterministicPath } from './path'
import type { Problem } from './problem'
import type { Plan, Tally } from './tally'
import { motionWords, switchingWords } from './words'

interface Context { spec: JobSpec, problem: Problem, plan: Plan, tally: Tally, layout: PathsLayout, complete: boolean }

const PERCENTILES = [0.01, 0.1, 0.5, 0.9, 0.99, 0.999] as const
const SURVIVAL_POINTS = 241
/** Samples of the noiseless path and of the mean that travel with an answer. */
const DRAWN_SAMPLES = 2400

/** What an answer says of its run. */
export function runRecord({ spec, plan, tally }: { spec: JobSpec, plan: Plan, tally: Pick<Tally, 'trialSteps'> }): RunRecord {
  return {
    engineVersion: ENGINE_VERSION, specHash: specHash(spec), seed: spec.numerics.seed,
    scheme: 'fourth-order Runge–Kutta, thermal field held over the step (Stratonovich)',
    step: plan.step, phaseStep: plan.phaseStep, stepFrom: plan.stepFrom, trialSteps: tally.trialSteps,
  }
}

/** The answer to “How fast does it switch?” from the trials so far (at least one). */
export function switchingAnswer(context: Context): SwitchingAnswer {
  const { spec, problem, tally, layout, complete } = context
  if (spec.question.kind !== 'switching') throw new TypeError('not a switching job')
  const { trials } = tally
  const crossed = tally.times.filter(t => !Number.isNaN(t))
  const sorted = crossed.slice().sort()
  const moments = meanAndSpread(crossed)
  const failures = {
    afterSettling: proportion(tally.settlesNear, trials),
    atPulseEnd: proportion(tally.endsNear, trials),
    neverCrossed: proportion(trials - crossed.length, trials),
  }
  const partial = {
    kind: 'switching' as const,
    complete,
    trials,
    failureRule: spec.question.failureRule,
    failures,
    ...(complete ? { agreement: agreement(spec, problem, failures) } : {}),
    undecided: tally.undecided,
    time: {
      crossed: crossed.length,
      mean: moments?.mean ?? null,
      spread: moments?.spread ?? null,
      percentiles: PERCENTILES.map(share => ({ share, ...orderQuantile(sorted, trials, share) })),
    },
    survival: survivalCurve(sorted, trials, problem),
    ...(tally.ensemble ? ensembleAnswer(spec, problem, tally.ensemble) : {}),
    histogram: histogram(sorted),
    deterministic: deterministicPath(spec, DRAWN_SAMPLES, problem),
    paths: layout,
    run: runRecord(context),
  }
  return { ...partial, words: { ...switchingWords(spec, partial), cautions: cautions(spec, problem) } }
}

function survivalCurve(sorted: Float64Array, trials: number, problem: Problem): SwitchingAnswer['survival'] {
  const end = problem.pulse[problem.pulse.length - 1]!.end / problem.rate
  const curve: SwitchingAnswer['survival'] = { time: [], value: [], low: [], high: [] }
  let passed = 0
  for (let k = 0; k < SURVIVAL_POINTS; k++) {
    const t = end * k / (SURVIVAL_POINTS - 1)
    while (passed < sorted.length && sorted[passed]! <= t) passed++
    const { low, high } = wilson(trials - passed, trials)
    curve.time.push(t)
    curve.value.push((trials - passed) / trials)
    curve.low.push(low)
    curve.high.push(high)
  }
  return curve
}

function histogram(sorted: Float64Array): SwitchingAnswer['histogram'] {
  if (sorted.length === 0) return { edges: [], counts: [] }
  const bins = Math.min(72, Math.max(8, Math.round(Math.sqrt(sorted.length))))
  const low = sorted[0]!
  const width = (sorted[sorted.length - 1]! - low) / bins || Math.abs(low) * 1e-3 || 1e-12
  const counts = new Array<number>(bins).fill(0)
  for (const t of sorted) counts[Math.min(bins - 1, Math.floor((t - low) / width))]! += 1
  return { edges: Array.from({ length: bins + 1 }, (_, k) => low + k * width), counts }
}

/** The answer to “How does it move?” from the paths so far (at least one). */
export function motionAnswer(context: Context): MotionAnswer {
  const { spec, problem, tally, layout, complete } = context
  const crossings = Array.from(tally.times, t => Number.isNaN(t) ? null : t)
  const partial = {
    kind: 'motion' as const,
    complete,
    deterministic: deterministicPath(spec, DRAWN_SAMPLES, problem),
    ended: proportion(tally.trials - tally.endsNear, tally.trials),
    crossed: crossings.filter(t => t !== null).length,
    crossings,
    mean: meanPath(tally.paths, layout),
    paths: layout,
    run: runRecord(context),
  }
  return { ...partial, words: { ...motionWords(spec, partial), cautions: cautions(spec, problem) } }
}

function meanPath(paths: Float32Array, layout: PathsLayout): MotionAnswer['mean'] {
  const stride = layout.samples * 3
  const m = new Array<number>(stride).fill(0)
  for (let p = 0; p < layout.paths; p++) for (let k = 0; k < stride; k++) m[k]! += paths[p * stride + k]!
  return {
    time: Array.from({ length: layout.samples }, (_, k) => Number((layout.start + k * layout.interval).toPrecision(7))),
    m: m.map(sum => Number((sum / layout.paths).toFixed(6))),
  }
}
