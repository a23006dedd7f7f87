import type { JobSummary } from '#shared/schemas/api'
import type { JobPreset } from '#shared/schemas/presets'
import { formatDuration } from '#shared/utils/format'

/** The state of a job in words, with how far a running one has come. */
export function stateWords({ state, progress }: Pick<JobSummary, 'state' | 'progress'>): string {
  if (state === 'running') return `running, ${Math.floor(progress * 100)} %`
  return { queued: 'waiting', done: 'done', failed: 'failed', cancelled: 'cancelled' }[state]
}

/** "preset Q-28 v4 · changed": which version a job was made from. */
export const presetWords = ({ name, version, changed }: JobPreset): string => `preset ${name} v${version}${changed ? ' · changed' : ''}`

/** Title of a job's tab: how it stands, then what it asks. "62 % · How fast does cell Q-28 …" */
export function jobTitle(job: Pick<JobSummary, 'state' | 'progress' | 'sentence'>): string {
  return `${job.state === 'running' ? `${Math.floor(job.progress * 100)} %` : stateWords(job)} · ${job.sentence}`
}

/** Title of any other tab, with how many of the reader's own jobs wait or run. "2 running · Presets · Farpole" */
export const pageTitle = (title: string | undefined, running: number): string =>
  [running > 0 ? `${running} running` : '', title ?? '', 'Farpole'].filter(Boolean).join(' · ')

export const isOpen = ({ state }: Pick<JobSummary, 'state'>): boolean => state === 'queued' || state === 'running'

/** CPU time used, or what it is expected to take before it has used any. */
export function cpuWords(job: Pick<JobSummary, 'state' | 'cpuSeconds' | 'predictedCpuSeconds'>): string {
  return isOpen(job) || job.cpuSeconds === 0 ? `about ${formatDuration(job.predictedCpuSeconds)}` : formatDuration(job.cpuSeconds)
}

const DAY_MS = 86_400_000

/** Local time as short as it can be told: "14:02", "yesterday 9:05", "28 Nov 2026, 14:02". Depends on the time zone: for mounted pages. */
export function timeWords(iso: string, now = new Date()): string {
  const at = new Date(iso)
  const clock = at.toLocaleTimeString('en-GB', { hour: '2-digit', minute: '2-digit' })
  const midnight = new Date(now.getFullYear(), now.getMonth(), now.getDate()).getTime()
  if (at.getTime() >= midnight && at.getTime() < midnight + DAY_MS) return clock
  if (at.getTime() >= midnight - DAY_MS && at.getTime() < midnight) return `yesterday ${clock}`
  const year = at.getFullYear() === now.getFullYear() ? '' : ` ${at.getFullYear()}`
  return `${at.getDate()} ${at.toLocaleDateString('en-GB', { month: 'short' })}${year}, ${clock}`
}
