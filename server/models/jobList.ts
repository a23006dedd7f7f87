import { QueryTypes } from 'sequelize'
import { JOB_STATES } from '#shared/schemas/api'
import type { JobListQuery, JobSort } from '#shared/schemas/jobList'
import type { Database } from './database'
import { JOB_SUMMARY_COLUMNS } from './jobs'
import type { Job } from './jobs'

/** Where a page ends, in the order that it was read in. */
export interface Place {
  sort: JobSort
  /** Milliseconds, CPU microseconds, or the state's number, after the sort. */
  value: number
  /** When the row was made, milliseconds; tells rows of one state apart. */
  madeAt: number
  id: string
}

const JOINT = '~'
const PLACE = /^(-?[a-z]+)~(\d{1,16})~(\d{1,16})~([0-9A-Za-z]{12,32})$/

/** A place as the cursor that clients hand back. */
export const toCursor = ({ sort, value, madeAt, id }: Place): string => Buffer.from([sort, value, madeAt, id].join(JOINT)).toString('base64url')

/** The place that a cursor of this sort names; null for one that is damaged or of another sort. */
export function fromCursor(cursor: string, sort: JobSort): Place | null {
  const [, name, value, madeAt, id] = PLACE.exec(Buffer.from(cursor, 'base64url').toString('latin1')) ?? []
  if (name !== sort || id === undefined) return null
  const place = { sort, value: Number(value), madeAt: Number(madeAt), id }
  return toCursor(place) === cursor && Number.isSafeInteger(place.value) && place.madeAt <= LAST_INSTANT ? place : null
}

const LAST_INSTANT = 253_402_300_799_999

interface Order { by: string, after: string }
const TIME_DOWN = 'createdAt < :madeAt OR (createdAt = :madeAt AND id < :id)'
const TIME_UP = 'createdAt > :madeAt OR (createdAt = :madeAt AND id > :id)'

/** Every order with the condition for what comes after a place; `state` has the newest first within each state. */
const ORDERS: Record<JobSort, Order> = {
  '-created': { by: 'createdAt DESC, id DESC', after: TIME_DOWN },
  'created': { by: 'createdAt, id', after: TIME_UP },
  '-cpu': { by: 'cpuShownMicros DESC, id DESC', after: 'cpuShownMicros < :value OR (cpuShownMicros = :value AND id < :id)' },
  'cpu': { by: 'cpuShownMicros, id', after: 'cpuShownMicros > :value OR (cpuShownMicros = :value AND id > :id)' },
  'state': { by: 'stateRank, createdAt DESC, id DESC', after: 'stateRank > :value OR (stateRank = :value AND createdAt < :madeAt) OR (stateRank = :value AND createdAt = :madeAt AND id < :id)' },
  '-state': { by: 'stateRank DESC, createdAt, id', after: 'stateRank < :value OR (stateRank = :value AND createdAt > :madeAt) OR (stateRank = :value AND createdAt = :madeAt AND id > :id)' },
}

/** The words of a search as the column `searched` has them: lower case, without the narrow spaces that group digits. */
export const searchTerms = (text: string): string[] => [...new Set(text.toLowerCase().replaceAll('\u202F', '').split(/\s+/).filter(Boolean))]

export type JobFilter = Omit<JobListQuery, 'cursor' | 'limit' | 'sort'>

interface Condition { sql: string, values: Record<string, string | number | Date> }

function conditionsOf({ state, owner, question, preset, from, to, q }: JobFilter): Condition[] {
  const conditions: Condition[] = []
  if (state === 'open') conditions.push({ sql: 'stateRank <= 2', values: {} })
  else if (state) conditions.push({ sql: 'stateRank = :state', values: { state: JOB_STATES.indexOf(state) + 1 } })
  if (owner) conditions.push({ sql: 'ownerId = :owner', values: { owner } })
  if (question) conditions.push({ sql: 'question = :question', values: { question } })
  if (preset) conditions.push({ sql: 'presetId = :preset', values: { preset } })
  if (from) conditions.push({ sql: 'createdAt >= :from', values: { from: new Date(from) } })
  if (to) conditions.push({ sql: 'createdAt < :to', values: { to: new Date(to) } })
  searchTerms(q ?? '').forEach((term, k) => conditions.push({ sql: `LOCATE(CAST(:term${k} AS BINARY), searched)`, values: { [`term${k}`]: term } }))
  return conditions
}

/**
 * A page of a team's jobs. `next` is the place to read on from, null on the last page. Filters only narrow the team's jobs.
 * A row that changes between two pages may move across their border; all others come exactly once.
 */
export async function listJobs(
  db: Database, teamId: string, filter: JobFilter, { sort, after, limit }: { sort: JobSort, after: Place | null, limit: number },
): Promise<{ jobs: Job[], next: Place | null }> {
  const order = ORDERS[sort]
  const conditions = [{ sql: 'teamId = :teamId AND deletedAt IS NULL', values: { teamId } }, ...conditionsOf(filter)]
  if (after) conditions.push({ sql: `(${order.after})`, values: { value: after.value, madeAt: new Date(after.madeAt), id: after.id } })
  // The words lie in one index alone; the planner would read whole rows for them.
  const index = filter.q ? 'FORCE INDEX (jobsByWords)' : ''
  // Ids first, from an index that holds all that is asked of them; then the rows of the page, which are long.
  const found = await db.sequelize.query<{ id: string, rank: number, cpu: number, madeAt: Date }>(
    `SELECT id, stateRank AS rank, cpuShownMicros AS cpu, createdAt AS madeAt FROM jobs ${index}
    WHERE ${conditions.map(({ sql }) => sql).join(' AND ')} ORDER BY ${order.by} LIMIT ${limit + 1}`,
    { replacements: Object.assign({}, ...conditions.map(({ values }) => values)), type: QueryTypes.SELECT })
  const page = found.slice(0, limit)
  const rows = await db.models.Job.findAll({ where: { id: page.map(({ id }) => id) }, attributes: [...JOB_SUMMARY_COLUMNS] })
  const byId = new Map(rows.map(row => [row.id, row]))
  const last = found.length > limit ? page.at(-1) : undefined
  return {
    jobs: page.flatMap(({ id }) => byId.get(id) ?? []),
    next: last ? { sort, value: placeValue(sort, last), madeAt: last.madeAt.getTime(), id: last.id } : null,
  }
}

function placeValue(sort: JobSort, row: { rank: number, cpu: number, madeAt: Date }): number {
  if (sort.endsWith('cpu')) return row.cpu
  return sort.endsWith('state') ? row.rank : row.madeAt.getTime()
}

/** People of a team who have jobs in its list, by name. */
export function askersOf(db: Database, teamId: string): Promise<{ id: string, name: string }[]> {
  return db.sequelize.query<{ id: string, name: string }>(`
    SELECT id, name FROM users WHERE teamId = :teamId
      AND EXISTS (SELECT 1 FROM jobs WHERE jobs.teamId = users.teamId AND jobs.deletedAt IS NULL AND jobs.ownerId = users.id)
    ORDER BY name, id`, { replacements: { teamId }, type: QueryTypes.SELECT })
}
