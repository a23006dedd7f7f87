import { QueryTypes } from 'sequelize'
import type { Database } from './database'

/** What one user has in the queue. */
export interface Load { userId: string, teamId: string, runningChunks: number, waitingJobs: number, waitingCpuMicros: number }

/** Loads of all users who have jobs that wait or run. `waitingCpuMicros`: what is left of the price of these. */
export async function loadsByUser(db: Database): Promise<Load[]> {
  return db.sequelize.query<Load>(`
    SELECT jobs.ownerId AS userId, jobs.teamId AS teamId, COALESCE(MAX(busy.chunks), 0) AS runningChunks,
      CAST(SUM(jobs.state = 'queued') AS SIGNED) AS waitingJobs,
      CAST(SUM(jobs.predictedCpuMicros * (1 - jobs.chunksDone / GREATEST(jobs.chunksTotal, 1))) AS SIGNED) AS waitingCpuMicros
    FROM jobs LEFT JOIN (
      SELECT running.ownerId AS ownerId, COUNT(*) AS chunks FROM chunks JOIN jobs AS running ON running.id = chunks.jobId
      WHERE chunks.state = 'running' GROUP BY running.ownerId) AS busy ON busy.ownerId = jobs.ownerId
    WHERE jobs.state IN ('queued', 'running') GROUP BY jobs.ownerId, jobs.teamId`, { type: QueryTypes.SELECT })
}

export interface WorkerUse { host: string, slots: number, busy: number, heartbeatAt: Date }

/** Workers that are alive, with the chunks that each runs. */
export async function workersInUse(db: Database): Promise<WorkerUse[]> {
  return db.sequelize.query<WorkerUse>(`
    SELECT workers.host AS host, workers.slots AS slots, workers.heartbeatAt AS heartbeatAt,
      (SELECT COUNT(*) FROM chunks WHERE chunks.state = 'running' AND chunks.workerId = workers.id) AS busy
    FROM workers WHERE workers.heartbeatAt > UTC_TIMESTAMP(3) - INTERVAL 30 SECOND ORDER BY workers.host, workers.id`, { type: QueryTypes.SELECT })
}
