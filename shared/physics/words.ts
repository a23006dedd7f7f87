import type { FailureAnswer, MotionAnswer, SwitchingAnswer } from '../schemas/answer'
import type { JobSpec } from '../schemas/job'
import { formatCount, formatNumber, formatShare, formatUncertain, THIN } from '../utils/format'
import { formatPlain } from '../utils/quantity'
import { RULE_WORDS } from '../utils/sentence'
import { DISAGREEMENT } from './agreement'

const nanoseconds = (t: number, digits = 3) => `${formatNumber(t * 1e9, digits)}${THIN}ns`
const times = (n: number, one: string, many: string) => `${formatCount(n)} ${n === 1 ? one : many}`

/** The failures without sampling error, where they are solved. */
function solvedWords({ agreement, failureRule }: Omit<SwitchingAnswer, 'words'>): string {
  if (agreement?.kind !== 'solved') return ''
  const { value, apart } = agreement[failureRule]
  const verdict = Math.abs(apart) > DISAGREEMENT ? `the count lies ${Math.abs(apart).toFixed(1)} standard errors away: the two disagree` : 'the count agrees'
  return ` Without sampling (Fokker–Planck) ${value > 0 ? formatShare(value) : 'fewer than 10⁻¹⁵'} fail; ${verdict}.`
}

/** Heading and second line of a switching answer. */
export function switchingWords(spec: JobSpec, answer: Omit<SwitchingAnswer, 'words'>): { headline: string, detail: string } {
  const { time, trials, failures, complete } = answer
  const width = formatPlain(spec.write.width, 'time', 'ns')
  const soFar = complete ? `over ${times(trials, 'trial', 'trials')}` : `from ${times(trials, 'trial', 'trials')} so far`
  const failure = failures[answer.failureRule]
  const failureWords = failure.count === 0
    ? `none fails, counted ${RULE_WORDS[answer.failureRule]} (below ${formatShare(failure.high)} at 95${THIN}%)`
    : `${formatShare(failure.value)} fail, counted ${RULE_WORDS[answer.failureRule]} (${formatShare(failure.low)} to ${formatShare(failure.high)} at 95${THIN}%)`
  if (time.mean === null || time.spread === null) {
    const crossedShare = failures.neverCrossed
    return {
      headline: time.crossed === 0 ? `It does not switch within the ${width} pulse.` : `Hardly ever: one trial of ${formatCount(trials)} crossed within the ${width} pulse.`,
      detail: `At 95${THIN}% fewer than ${formatShare(1 - crossedShare.low)} of such writes cross the equator; ${failureWords}, ${soFar}.${solvedWords(answer)}`,
    }
  }
  const mean = `${formatUncertain(time.mean.value * 1e9, time.mean.standardError * 1e9)}${THIN}ns`
  const spread = `${formatUncertain(time.spread.value * 1e9, time.spread.standardError * 1e9)}${THIN}ns`
  const crossedShare = time.crossed / trials
  if (crossedShare < 0.5) {
    return {
      headline: `Only ${formatShare(crossedShare)} switch within the ${width} pulse, after ${mean} on average.`,
      detail: `Share 95${THIN}%: ${formatShare(1 - failures.neverCrossed.high)} to ${formatShare(1 - failures.neverCrossed.low)}; ${failureWords}, ${soFar}.${solvedWords(answer)}`,
    }
  }
  const late = [...time.percentiles].reverse().find(p => p.value !== null && p.high !== null && p.share >= 0.9)
  const tail = crossedShare < 1 && late === undefined
    ? `; ${formatShare(crossedShare)} have crossed when the pulse ends.`
    : late === undefined ? '.' : `, and ${formatShare(late.share)} have crossed by ${nanoseconds(late.value!)}.`
  const conditional = time.crossed < trials ? ' of those that cross' : ''
  return {
    headline: `It switches in ${mean} on average${tail}`,
    detail: `Mean 95${THIN}%: ${(time.mean.low * 1e9).toPrecision(4)} to ${(time.mean.high * 1e9).toPrecision(4)}${THIN}ns${conditional}; spread ${spread}; ${failureWords}, ${soFar}.${solvedWords(answer)}`,
  }
}

/** Heading and second line of an answer about widths. */
export function failureWords(spec: JobSpec, answer: Omit<FailureAnswer, 'words'>): { headline: string, detail: string } {
  const { target, needed, checks, solution, failureRule, complete } = answer
  const longest = formatPlain(spec.write.width, 'time', 'ns')
  const counted = `counted ${RULE_WORDS[failureRule]}`
  const goal = formatShare(target, 1)
  const trials = checks.reduce((sum, check) => sum + check.trials, 0)
  const soFar = `${times(trials, 'trial', 'trials')} at ${times(checks.length, 'width', 'widths')}${complete ? '' : ' so far'}`
  if (solution.kind === 'solved') {
    const last = solution.value.findLastIndex(value => value > 0)
    const reach = last < 0 ? '' : ` ${formatShare(solution.value[last]!)} fail at ${nanoseconds(solution.width[last]!)}.`
    const apart = checks.flatMap(check => check.solved ? [Math.abs(check.solved.apart)] : [])
    const worst = Math.max(0, ...apart)
    const verdict = worst > DISAGREEMENT ? `and contradict it by up to ${worst.toFixed(1)} standard errors: use neither before you know why` : `and agree with it, at most ${worst.toFixed(1)} standard errors away`
    return {
      headline: needed ? `A write error of ${goal} needs a pulse of ${nanoseconds(needed.width, 4)}.` : `A write error of ${goal} is not reached by any pulse that was looked at.${reach}`,
      detail: `Solved without sampling error (axial Fokker–Planck), ${counted}; ${soFar} check it ${verdict}.`,
    }
  }
  const end = checks.find(check => check.width >= spec.write.width * (1 - 1e-9))
  const atEnd = end ? end.failures[failureRule] : null
  const share = !atEnd ? null : atEnd.count === 0 ? `fewer than ${formatShare(atEnd.high)} fail (95${THIN}%)` : `${formatShare(atEnd.value)} fail (${formatShare(atEnd.low)} to ${formatShare(atEnd.high)} at 95${THIN}%)`
  return {
    headline: needed
      ? `A write error of ${goal} needs about ${formatUncertain(needed.width * 1e9, (needed.standardError ?? 0) * 1e9)}${THIN}ns, by extrapolation.`
      : share ? `With ${longest} ${share}.` : `Being counted.`,
    detail: `From ${soFar}, ${counted}${share && needed ? `; with ${longest} ${share}` : ''}. No solution without sampling here: ${solution.reason}.${needed ? ' The extrapolation takes the tail for straight.' : ''}`,
  }
}

/** Heading and second line of a motion answer. */
export function motionWords(spec: JobSpec, answer: Omit<MotionAnswer, 'words'>): { headline: string, detail: string } {
  const [near, far] = spec.write.direction === 'parallelToAntiparallel' ? ['parallel', 'antiparallel'] : ['antiparallel', 'parallel']
  const { deterministic, paths, crossed } = answer
  const quiet = deterministic.crossing === null
    ? `Without noise it stays ${near}`
    : deterministic.endsFar ? `Without noise it crosses the equator at ${nanoseconds(deterministic.crossing)} and ends ${far}` : `Without noise it crosses the equator at ${nanoseconds(deterministic.crossing)} but falls back to ${near}`
  const far_ = answer.ended?.count ?? 0
  const noisy = paths.paths === 1
    ? (far_ === 1 ? 'so does the path with noise' : `the path with noise stays ${near}`)
    : `${formatCount(far_)} of ${formatCount(paths.paths)} paths with noise end ${far}`
  const first = answer.crossings.filter((t): t is number => t !== null).sort((a, b) => a - b)
  const range = first.length > 1 ? ` They cross between ${nanoseconds(first[0]!)} and ${nanoseconds(first[first.length - 1]!)}.` : ''
  return {
    headline: `${quiet}; ${noisy}.`,
    detail: `${times(crossed, 'path crosses', 'paths cross')} the equator while watched.${range} With ${times(paths.paths, 'path', 'paths')} this shows how the moment moves, not how often it fails: ask how fast it switches for that.`,
  }
}
