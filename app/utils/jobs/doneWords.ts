import type { Answer } from '#shared/schemas/answer'
import type { JobSpec } from '#shared/schemas/job'
import { formatCount } from '#shared/utils/format'

/** Trials or paths that an answer is made from. */
export function trialsOf(answer: Answer): number {
  if (answer.kind === 'switching') return answer.trials
  return answer.kind === 'motion' ? answer.crossings.length : answer.checks.reduce((sum, { trials }) => sum + trials, 0)
}

/** "3200 of 10 000 trials". */
export function doneWords({ question }: JobSpec, done: number): string {
  const [asked, name] = question.kind === 'motion'
    ? [question.paths, 'paths']
    : [question.kind === 'switching' ? question.trials : question.trials * question.widths, 'trials']
  return `${formatCount(done)} of ${formatCount(asked)} ${name}`
}
