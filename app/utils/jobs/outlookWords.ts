import type { Eta, Waiting } from '#shared/schemas/waiting'
import { formatCount, formatDuration } from '#shared/utils/format'

/** As fine as an estimate deserves; seconds. */
export function rough(seconds: number): number {
  if (seconds < 5) return Math.max(1, Math.round(seconds))
  if (seconds >= 60) return Math.round(seconds / (seconds < 600 ? 30 : seconds < 7200 ? 300 : 1800)) * (seconds < 600 ? 30 : seconds < 7200 ? 300 : 1800)
  const step = seconds < 20 ? 2 : 5
  return Math.round(seconds / step) * step
}

/** How long until a job is over, as a range from now: "20–50 s", "4 m to 7 m"; null when its latest end has passed. */
export function etaWords(eta: Eta, now: Date): string | null {
  const left = (instant: string) => (Date.parse(instant) - now.getTime()) / 1000
  const [soonest, latest] = [left(eta.low), left(eta.high)]
  if (latest <= 0) return null
  const low = soonest <= 1 ? 0 : rough(soonest)
  const high = Math.max(low + 1, rough(latest))
  if (low === 0) return `within ${whole(high)}`
  return high < 60 ? `${low}–${high}\u202Fs` : `${whole(low)} to ${whole(high)}`
}

const whole = (seconds: number): string => seconds < 60 ? `${seconds}\u202Fs` : formatDuration(seconds)

/** How much stands before a waiting job: "3 jobs, about 40 s of CPU time, before it". */
export function beforeWords({ jobsBefore, cpuSecondsBefore }: Waiting): string | null {
  if (jobsBefore === 0) return null
  const work = cpuSecondsBefore < 0.5 ? '' : `, about ${formatDuration(rough(cpuSecondsBefore))} of CPU time,`
  return `${formatCount(jobsBefore)} ${jobsBefore === 1 ? 'job' : 'jobs'}${work} before it`
}
