import { normalQuantile } from '../numerics/normal'
import { regularizedBeta } from '../numerics/statistics'
import type { Proportion, SwitchingAnswer } from '../schemas/answer'
import type { FailureRule, JobSpec } from '../schemas/job'
import type { Problem } from './problem'
import { collinearProblem, writeErrors } from './writeError'

/** Standard errors beyond which two ways to the same number are said to disagree. */
export const DISAGREEMENT = 4
/** Figures that are kept: the same on every machine, and more than the solution is exact to. */
const FIGURES = 6
/** Chances beyond this many standard errors cannot be told apart in double precision. */
const MOST_ERRORS = 38

/**
 * How far a count lies from what a probability leads to expect, in standard errors of a normal with the same chance: exact binomial tails
 * with half of the count's own chance (Lancaster, J. Am. Stat. Assoc. 56, 223 (1961), from memory), so that it holds for few and no events.
 */
export function standardErrorsApart({ count, of }: Pick<Proportion, 'count' | 'of'>, probability: number): number {
  if (probability <= 0) return count === 0 ? 0 : MOST_ERRORS
  if (probability >= 1) return count === of ? 0 : -MOST_ERRORS
  /** P(X ≥ k) */
  const atLeast = (k: number) => k <= 0 ? 1 : k > of ? 0 : regularizedBeta(probability, k, of - k + 1)
  /** P(X ≤ k), not as 1 − P(X ≥ k + 1): both tails may be tiny */
  const atMost = (k: number) => k < 0 ? 0 : k >= of ? 1 : regularizedBeta(1 - probability, of - k, k + 1)
  const above = (atLeast(count) + atLeast(count + 1)) / 2
  const below = (atMost(count) + atMost(count - 1)) / 2
  const errors = above < below ? -normalQuantile(Math.max(above, Number.MIN_VALUE)) : normalQuantile(Math.max(below, Number.MIN_VALUE))
  return Math.max(-MOST_ERRORS, Math.min(MOST_ERRORS, errors))
}

/** The failures solved without sampling beside those counted; in words what keeps them from being solved. */
export function agreement(spec: JobSpec, problem: Problem, failures: SwitchingAnswer['failures']): NonNullable<SwitchingAnswer['agreement']> {
  const collinear = collinearProblem(spec, problem)
  if (typeof collinear === 'string') return { kind: 'missing', reason: collinear }
  const of = (rule: FailureRule) => {
    const value = Number((writeErrors(collinear, [spec.write.width], rule)[0] ?? 0).toPrecision(FIGURES))
    return { value, apart: Number(standardErrorsApart(failures[rule], value).toFixed(2)) }
  }
  return { kind: 'solved', afterSettling: of('afterSettling'), atPulseEnd: of('atPulseEnd'), neverCrossed: of('neverCrossed') }
}
