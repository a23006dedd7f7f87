import { proportion } from '../numerics/statistics'
import type { FailureAnswer, Proportion } from '../schemas/answer'
import type { JobSpec } from '../schemas/job'
import { LIMITS } from '../schemas/job'
import { standardErrorsApart } from './agreement'
import { runRecord } from './answers'
import { cautions } from './cautions'
import { PhysicsError } from './errors'
import type { Problem } from './problem'
import type { Plan } from './tally'
import { failureWords } from './words'
import { closedFormError, collinearProblem, widthForError, writeErrorCurve, writeErrors } from './writeError'

const CURVE_POINTS = 160
/** Figures that are kept of what is solved: the same on every machine. */
const FIGURES = 6

/**
 * The job at each of its widths, as the question of switching that its trials answer. @throws PhysicsError where the widths make no range
 */
export function widthsOf(spec: JobSpec): JobSpec[] {
  const { question, write } = spec
  if (question.kind !== 'failure') throw new TypeError('not a job about widths')
  const { shortest, widths, trials, failureRule } = question
  if (write.waveform) throw new PhysicsError(['write', 'waveform'], 'Write errors against width are asked for one pulse; take away what follows it, or ask how fast it switches.')
  if (shortest >= write.width) throw new PhysicsError(['question', 'shortest'], 'The shortest pulse has to be shorter than the pulse width, which is the longest.')
  if (shortest < write.edge) throw new PhysicsError(['question', 'shortest'], 'The shortest pulse has to be at least as long as its edge.')
  if (widths * trials > LIMITS.trials) throw new PhysicsError(['question', 'trials'], `At ${widths} widths that are ${widths * trials} trials; one job does at most ${LIMITS.trials}.`)
  return Array.from({ length: widths }, (_, k): JobSpec => {
    const width = Number((shortest + (write.width - shortest) * k / (widths - 1)).toPrecision(9))
    return { ...spec, question: { kind: 'switching', trials, failureRule }, write: { ...write, width } }
  })
}

/** The plans of all widths as one. */
export function planOfWidths(plans: readonly Plan[]): Plan {
  const [first] = plans
  if (!first) throw new TypeError('no widths')
  const trials = plans.reduce((sum, plan) => sum + plan.trials, 0)
  const trialSteps = plans.reduce((sum, plan) => sum + plan.trialSteps, 0)
  const finest = plans.reduce((best, plan) => plan.step < best.step ? plan : best, first)
  return { ...finest, trials, trialSteps, stepsPerTrial: trialSteps / trials }
}

/** How the trials at one width ended, as far as they are done. Undecided ones count among those that settle near. */
export interface WidthCount { trials: number, endsNear: number, settlesNear: number, undecided: number, uncrossed: number }

interface Context { spec: JobSpec, problem: Problem, plan: Plan, trialSteps: number, counts: ReadonlyMap<number, WidthCount> }

/** The answer to “How often does the write fail?” from the trials so far. */
export function failureAnswer({ spec, problem, plan, trialSteps, counts }: Context): FailureAnswer {
  if (spec.question.kind !== 'failure') throw new TypeError('not a job about widths')
  const { failureRule, target, trials } = spec.question
  const parts = widthsOf(spec)
  const collinear = collinearProblem(spec, problem)
  const solves = typeof collinear !== 'string'
  const round = (value: number) => Number(value.toPrecision(FIGURES))
  const solvedAt = solves ? Array.from(writeErrors(collinear, parts.map(part => part.write.width), failureRule), round) : []
  const checks = [...counts.entries()].sort(([a], [b]) => a - b).map(([k, count]) => {
    const failures = {
      afterSettling: proportion(count.settlesNear, count.trials), atPulseEnd: proportion(count.endsNear, count.trials), neverCrossed: proportion(count.uncrossed, count.trials),
    }
    const value = solvedAt[k]
    return {
      width: parts[k]!.write.width, trials: count.trials, undecided: count.undecided, failures,
      solved: value === undefined ? null : { value, apart: Number(standardErrorsApart(failures[failureRule], value).toFixed(2)) },
    }
  })
  const curve = solves ? writeErrorCurve(collinear, failureRule, CURVE_POINTS) : null
  const read = curve && widthForError(curve, target)
  const partial: Omit<FailureAnswer, 'words'> = {
    kind: 'failure',
    complete: checks.length === parts.length && checks.every(check => check.trials === trials),
    failureRule, target,
    needed: read ? { width: round(read), standardError: null, from: 'solution' } : solves ? null : extrapolated(checks.map(({ width, failures }) => ({ width, counted: failures[failureRule] })), target),
    checks,
    solution: curve && solves
      ? { kind: 'solved', width: curve.width.map(round), value: curve.value.map(round), closedForm: closedFormError(collinear, curve.width)?.map(round) ?? null }
      : { kind: 'missing', reason: typeof collinear === 'string' ? collinear : '' },
    run: runRecord({ spec, plan, tally: { trialSteps } }),
  }
  return { ...partial, words: { ...failureWords(spec, partial), cautions: cautions(spec, problem) } }
}

/** Errors above this share are not on the straight part of the logarithm. */
const STRAIGHT = 0.2

/**
 * Width for the target by a straight line through ln(error) against width, weighted by the counts (variance of ln p̂ is (1 − p̂)/count),
 * with its standard error by propagation; null with fewer than three widths where some but few failed.
 */
export function extrapolated(points: readonly { width: number, counted: Proportion }[], target: number): FailureAnswer['needed'] {
  const used = points.filter(({ counted }) => counted.count > 0 && counted.value < STRAIGHT)
  if (used.length < 3) return null
  const weights = used.map(({ counted }) => counted.count / (1 - counted.value))
  const total = weights.reduce((sum, w) => sum + w, 0)
  const mean = (of: (k: number) => number) => weights.reduce((sum, w, k) => sum + w * of(k), 0) / total
  const x = mean(k => used[k]!.width)
  const y = mean(k => Math.log(used[k]!.counted.value))
  const spread = total * mean(k => (used[k]!.width - x) ** 2)
  const slope = total * mean(k => (used[k]!.width - x) * (Math.log(used[k]!.counted.value) - y)) / spread
  if (!(slope < 0)) return null
  const width = x + (Math.log(target) - y) / slope
  const standardError = Math.sqrt((1 / total + (width - x) ** 2 / spread) / slope ** 2)
  return width > 0 ? { width: Number(width.toPrecision(FIGURES)), standardError: Number(standardError.toPrecision(3)), from: 'extrapolation' } : null
}
