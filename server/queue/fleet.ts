import { QueryTypes } from 'sequelize'
import type { Database } from '../models/database'

/** Seconds without a heartbeat after which a worker, or a chunk that it runs, counts as lost. */
export const STALE_SECONDS = 15

export interface WorkerIdentity { id: string, host: string, pid: number, slots: number }

/** Enters a worker, or says that it is still there. */
export async function worksOn(db: Database, worker: WorkerIdentity): Promise<void> {
  await db.sequelize.query(`
    INSERT INTO workers (id, host, pid, slots, startedAt, heartbeatAt)
    VALUES (:id, :host, :pid, :slots, UTC_TIMESTAMP(3), UTC_TIMESTAMP(3))
    ON DUPLICATE KEY UPDATE heartbeatAt = UTC_TIMESTAMP(3)`, { replacements: { ...worker } })
}

/** Takes a worker off the list. */
export async function signOff(db: Database, id: string): Promise<void> {
  await db.models.WorkerRow.destroy({ where: { id } })
}

/** Removes workers that have been silent for a minute. */
export async function forgetSilentWorkers(db: Database): Promise<void> {
  await db.sequelize.query('DELETE FROM workers WHERE heartbeatAt < UTC_TIMESTAMP(3) - INTERVAL 60 SECOND')
}

/** `ready`: some chunk waits to be handed out. */
export interface Capacity { slots: number, running: number, queued: number, ready: boolean }

/** Slots of the workers that are alive, the chunks that they run and those on their way to them. */
export async function capacityOf(db: Database): Promise<Capacity> {
  const [row] = await db.sequelize.query<Omit<Capacity, 'ready'> & { ready: number }>(`
    SELECT
      (SELECT CAST(COALESCE(SUM(slots), 0) AS SIGNED) FROM workers WHERE heartbeatAt > UTC_TIMESTAMP(3) - INTERVAL ${STALE_SECONDS} SECOND) AS slots,
      (SELECT COUNT(*) FROM chunks WHERE state = 'running' AND heartbeatAt > UTC_TIMESTAMP(3) - INTERVAL ${STALE_SECONDS} SECOND) AS running,
      (SELECT COUNT(*) FROM chunks WHERE state = 'queued') AS queued,
      EXISTS (SELECT 1 FROM chunks WHERE state = 'ready') AS ready`, { type: QueryTypes.SELECT })
  if (!row) throw new Error('The database did not count.')
  return { ...row, ready: row.ready === 1 }
}
