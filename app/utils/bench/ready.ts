import type { Me } from '#shared/schemas/api'
import { formatCount, formatDuration } from '#shared/utils/format'
import { rough } from '~/utils/jobs/outlookWords'

/**
 * When a job of that price would be ready, as a range: between having the workers to itself at its turn and waiting for all that is
 * queued before it with half as much again. "ready in 20–50 s · 2 jobs before yours"
 */
export function readyWords(cpuSeconds: number, queue: Me['queue']): string {
  if (queue.slots === 0) return 'no worker is running: it waits until one is'
  const slots = queue.slots
  const low = rough(cpuSeconds / slots + 1)
  const high = Math.max(low + 1, rough((cpuSeconds + queue.waitingCpuSeconds) / slots * 1.5 + 2))
  const range = low < 60 && high < 60 ? `${low}–${high}\u202Fs` : `${formatDuration(low)} to ${formatDuration(high)}`
  const before = queue.waitingJobs === 0 ? 'nothing before yours' : `${formatCount(queue.waitingJobs)} ${queue.waitingJobs === 1 ? 'job' : 'jobs'} before yours`
  return `ready in ${range} · ${before}`
}
