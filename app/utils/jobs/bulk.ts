import type { JobSummary } from '#shared/schemas/api'
import type { BulkAction, BulkResult } from '#shared/schemas/jobList'
import { formatCount, formatDuration } from '#shared/utils/format'
import { isOpen } from '~/utils/jobWords'

/** Who would do it. */
export interface Actor { mayWrite: boolean, isAdmin: boolean }

/** Whether the reader may do this to the job as it stands. */
export function mayDo(action: BulkAction, job: Pick<JobSummary, 'state' | 'own'>, { mayWrite, isAdmin }: Actor): boolean {
  if (!mayWrite) return false
  if (action === 'rerun') return true
  return (job.own || isAdmin) && isOpen(job) === (action === 'cancel')
}

export const ACTION_WORDS: Record<BulkAction, string> = { cancel: 'Cancel', delete: 'Delete', rerun: 'Run again' }
const DONE_WORDS: Record<BulkAction, string> = { cancel: 'cancelled', delete: 'deleted', rerun: 'queued again' }

const jobs = (n: number) => n === 1 ? 'one job' : `${formatCount(n)} jobs`

/** What is asked before it is done: how many, what happens, and what is left out. */
export function confirmation(action: BulkAction, chosen: readonly JobSummary[], actor: Actor): { title: string, sentence: string | null, effect: string, leftOut: string | null, act: string } {
  const able = chosen.filter(job => mayDo(action, job, actor))
  const rest = chosen.length - able.length
  const price = formatDuration(able.reduce((sum, job) => sum + job.predictedCpuSeconds, 0))
  const one = able.length === 1
  const effects: Record<BulkAction, string> = {
    cancel: `${one ? 'It stops' : 'They stop'} at once. What is done so far stays as a partial answer, and the CPU time used stays counted.`,
    delete: `${one ? 'Its answer, figures and downloads go' : 'Their answers, figures and downloads go'} for the whole team and cannot be brought back. The CPU time used stays counted.`,
    rerun: `The same is asked anew with a new random seed${one ? '' : ' each'}, in your name. About ${price} of CPU time is reserved from your quota.`,
  }
  const why = action === 'cancel' ? 'ended already or not yours' : 'not ended yet or not yours'
  return {
    title: `${ACTION_WORDS[action]} ${jobs(able.length)}?`,
    act: `${ACTION_WORDS[action]} ${jobs(able.length)}`,
    sentence: one ? able[0]!.sentence : null,
    effect: effects[action],
    leftOut: rest === 0 ? null : `${rest === 1 ? 'One' : formatCount(rest)} of the ${formatCount(chosen.length)} selected ${rest === 1 ? 'is' : 'are'} left as ${rest === 1 ? 'it is' : 'they are'}: ${why}.`,
  }
}

/** What became of one job, for its row. */
export interface RowResult { ok: boolean, text: string, newId: string | null }

export function rowResult(action: BulkAction, { ok, problem, newId }: BulkResult): RowResult {
  if (ok) return { ok, text: DONE_WORDS[action], newId: newId ?? null }
  const reason = problem?.type === 'quota-exceeded' && problem.leftCpuSeconds !== undefined
    ? `your quota has ${formatDuration(problem.leftCpuSeconds)} left`
    : (problem?.detail ?? problem?.title ?? 'no reason was given').replace(/\.$/, '')
  return { ok, text: `not ${DONE_WORDS[action]}: ${reason}`, newId: null }
}

/** What became of all of them, in one sentence. */
export function summaryWords(action: BulkAction, results: readonly BulkResult[]): string {
  const done = results.filter(({ ok }) => ok).length
  const failed = results.length - done
  const first = done === 0 ? '' : `${done === 1 ? 'One job' : `${formatCount(done)} jobs`} ${DONE_WORDS[action]}.`
  return [first, failed === 0 ? '' : `${failed === 1 ? 'One was' : `${formatCount(failed)} were`} not; the reason is in the row.`].filter(Boolean).join(' ')
}
