import type { StreamEvent } from '#shared/schemas/api'
import { appendEvent } from '../models/events'
import type { Database } from '../models/database'
import { inTransaction } from '../models/transaction'
import { stageOf } from './experience'
import { presentOutlook, readOutlooks } from './outlooks'
import type { Outlooks } from './outlooks'

/** Predictions kept, and changes told to a team, in one round. */
const MOST_KEPT = 100
const MOST_TOLD = 40
const KEPT_DAYS = 30

type Told = Extract<StreamEvent, { type: 'outlook' }>['jobs'][number]

/** What the leader remembers between two rounds. */
export interface Foretold { stages: Map<string, number>, told: Map<string, Told> }

export const nothingForetold = (): Foretold => ({ stages: new Map(), told: new Map() })

/**
 * Keeps what is predicted of each job's end at each stage of its life, to be compared with its end, and tells the teams what
 * has changed for their jobs. Called about once a second by one process.
 */
export async function foretell(db: Database, memory: Foretold): Promise<void> {
  const seen = await readOutlooks(db)
  for (const known of [memory.stages, memory.told]) for (const id of known.keys()) if (!seen.jobs.has(id)) known.delete(id)
  await keepPredictions(db, seen, memory.stages)
  await tellChanges(db, seen, memory.told)
}

async function keepPredictions(db: Database, { at, jobs }: Outlooks, stages: Map<string, number>): Promise<void> {
  const made: [string, number, Date, number, number, number, number][] = []
  for (const [id, { prediction, stage: { queued, progress } }] of jobs) {
    if (made.length >= MOST_KEPT) break
    const stage = stageOf(queued, progress)
    if (!prediction || stages.get(id) === stage) continue
    stages.set(id, stage)
    made.push([id, stage, at, prediction.median, prediction.spread, prediction.low, prediction.high])
  }
  if (made.length === 0) return
  await db.sequelize.query(
    'INSERT IGNORE INTO etaPredictions (jobId, stage, madeAt, medianSeconds, spread, lowSeconds, highSeconds) VALUES :made', { replacements: { made } })
}

async function tellChanges(db: Database, seen: Outlooks, told: Map<string, Told>): Promise<void> {
  const changes = new Map<string, Told[]>()
  for (const [id, { teamId }] of seen.jobs) {
    const team = changes.get(teamId) ?? []
    if (team.length >= MOST_TOLD) continue
    const now = { id, ...presentOutlook(seen, id) }
    if (!isNews(told.get(id), now, seen.at.getTime())) continue
    told.set(id, now)
    changes.set(teamId, [...team, now])
  }
  if (changes.size === 0) return
  await inTransaction(db, async (tx) => {
    for (const [teamId, jobs] of changes) await appendEvent(db, tx, { teamId }, { type: 'outlook', jobs })
  })
}

/** Whether a reader of what was told before would now be wrong: another reason or place, or a range that has moved by a tenth of what is left. */
export function isNews(before: Told | undefined, now: Told, at: number): boolean {
  if (!before || before.waiting?.words !== now.waiting?.words || before.waiting?.jobsBefore !== now.waiting?.jobsBefore) return true
  if (before.eta === null || now.eta === null) return before.eta !== now.eta
  const allowed = Math.max(2000, (Date.parse(now.eta.high) - at) / 10)
  return Math.abs(Date.parse(before.eta.low) - Date.parse(now.eta.low)) > allowed || Math.abs(Date.parse(before.eta.high) - Date.parse(now.eta.high)) > allowed
}

/** Removes predictions that are too old to teach anything. */
export async function prunePredictions(db: Database): Promise<void> {
  await db.sequelize.query(`DELETE FROM etaPredictions WHERE madeAt < UTC_TIMESTAMP(3) - INTERVAL ${KEPT_DAYS} DAY LIMIT 5000`)
}
