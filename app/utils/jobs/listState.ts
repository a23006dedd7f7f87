import type { JobSummary } from '#shared/schemas/api'
import { jobListQuerySchema, JOB_SORTS, type JobListQuery, type JobSort } from '#shared/schemas/jobList'
import { isOpen } from '~/utils/jobWords'

/** What the page of jobs shows: filters, order and where it reads on from. It lives in the address. */
export type ListState = Omit<JobListQuery, 'limit'>

export const DEFAULT_SORT: JobSort = '-created'
const FILTERS = ['q', 'state', 'owner', 'question', 'preset', 'from', 'to'] as const
type FilterKey = typeof FILTERS[number]

/** The state that an address holds; what is damaged in it is left out. */
export function readListState(query: Readonly<Record<string, unknown>>): ListState {
  const state: Record<string, unknown> = {}
  for (const key of [...FILTERS, 'sort', 'cursor'] as const) {
    const value = query[key]
    if (typeof value === 'string' && jobListQuerySchema.shape[key].safeParse(value).success) state[key] = value
  }
  return jobListQuerySchema.omit({ limit: true }).parse(state)
}

/** The state as an address holds it: without what is so anyway. */
export function writeListState({ sort, ...rest }: ListState): Record<string, string> {
  const given = { ...rest, ...(sort && sort !== DEFAULT_SORT ? { sort } : {}) }
  return Object.fromEntries(Object.entries(given).filter((entry): entry is [string, string] => typeof entry[1] === 'string' && entry[1] !== ''))
}

/** The state with some filters or another order: from the first page again, since a place belongs to its order. */
export const changed = (state: ListState, change: Partial<Record<FilterKey | 'sort', string | undefined>>): ListState =>
  readListState({ ...state, ...change, cursor: undefined })

export const isFiltered = (state: ListState): boolean => FILTERS.some(key => state[key] !== undefined)

/** Whether a job is one of those that the filters let through, as the server finds. */
export function fits({ state, owner, question, preset, from, to, q }: ListState, job: JobSummary): boolean {
  const text = `${job.sentence} ${job.headline ?? ''}`.toLowerCase().replaceAll('\u202F', '')
  return (state === undefined || state === job.state || (state === 'open' && isOpen(job)))
    && (owner === undefined || owner === job.owner.id)
    && (question === undefined || question === job.question)
    && (preset === undefined || preset === job.preset?.id)
    && (from === undefined || Date.parse(job.createdAt) >= Date.parse(from))
    && (to === undefined || Date.parse(job.createdAt) < Date.parse(to))
    && (q ?? '').toLowerCase().replaceAll('\u202F', '').split(/\s+/).every(word => text.includes(word))
}

/** The order after a press on a column's head: its first way, then the other. */
export function nextSort(sort: JobSort, first: JobSort): JobSort {
  if (sort !== first) return first
  const other = first.startsWith('-') ? first.slice(1) : `-${first}`
  return JOB_SORTS.find(known => known === other) ?? first
}

/** `aria-sort` of a column whose rising order is `rising`. */
export const ariaSort = (sort: JobSort, rising: 'created' | 'cpu' | 'state'): 'ascending' | 'descending' | 'none' =>
  sort === rising ? 'ascending' : sort === `-${rising}` ? 'descending' : 'none'

/** The instant at which a day of the reader's calendar begins ("2026-11-28"), or ends; undefined for no day. In the browser alone. */
export function dayBounds(day: string): { from: string, to: string } | undefined {
  const [, year, month, date] = /^(\d{4})-(\d{2})-(\d{2})$/.exec(day) ?? []
  if (year === undefined) return undefined
  const at = (shift: number) => new Date(Number(year), Number(month) - 1, Number(date) + shift)
  const [begin, end] = [at(0), at(1)]
  if (!Number.isFinite(begin.getTime()) || Number(year) < 1970) return undefined
  return { from: begin.toISOString(), to: end.toISOString() }
}

/** The day of the reader's calendar that begins (`to`: that ends) at an instant. In the browser alone. */
export function dayOf(instant: string | undefined, end = false): string {
  if (!instant) return ''
  const at = new Date(Date.parse(instant) - (end ? 1 : 0))
  const two = (n: number) => String(n).padStart(2, '0')
  return `${at.getFullYear()}-${two(at.getMonth() + 1)}-${two(at.getDate())}`
}
