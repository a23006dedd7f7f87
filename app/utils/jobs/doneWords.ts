import type { Answer } from '#shared/schemas/answer'
import type { JobSpec } from '#shared/schemas/job'
import { formatCount } from '#shared/utils/format'

/** Trials or paths that an answer is made from. */
export const trialsOf = (answer: Answer): number => answer.kind === 'switching' ? answer.trials : answer.crossings.length

/** "3200 of 10 000 trials". */
export function doneWords({ question }: JobSpec, done: number): string {
  const [asked, name] = question.kind === 'switching' ? [question.trials, 'trials'] : [question.paths, 'paths']
  return `${formatCount(done)} of ${formatCount(asked)} ${name}`
}
