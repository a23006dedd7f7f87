import { QueryTypes } from 'sequelize'
import type { Database } from '../models/database'
import { announceJob } from '../models/events'
import { inTransaction } from '../models/transaction'

/**
 * Tells the teams of running jobs how far these are, one event a job, when it has changed since the last call with the
 * same `told`. Called about once a second by one process; other changes of a job are told when they happen.
 */
export async function announceProgress(db: Database, told: Map<string, string>): Promise<number> {
  const rows = await db.sequelize.query<{ id: string, mark: string }>(`
    SELECT jobs.id AS id, CONCAT(jobs.chunksDone, '+', COALESCE(SUM(chunks.progress), 0)) AS mark
    FROM jobs LEFT JOIN chunks ON chunks.jobId = jobs.id AND chunks.state = 'running'
    WHERE jobs.state = 'running' GROUP BY jobs.id, jobs.chunksDone`, { type: QueryTypes.SELECT })
  const running = new Set(rows.map(({ id }) => id))
  for (const id of told.keys()) if (!running.has(id)) told.delete(id)
  let changed = 0
  for (const { id, mark } of rows) {
    if (told.get(id) === mark) continue
    await inTransaction(db, tx => announceJob(db, tx, id))
    told.set(id, mark)
    changed++
  }
  return changed
}
