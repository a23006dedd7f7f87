import { QueryTypes, literal } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { Database } from '../models/database'
import { inTransaction } from '../models/transaction'
import type { ChunkQueue } from './chunkQueue'
import { afterServing, nextContender, room } from './fairness'
import { capacityOf } from './fleet'
import type { Dispatched } from './names'

/**
 * Hands out chunks that are ready, fairly between users, as many as there is room for; answers how many.
 * When Redis does not take them they are ready again. Throws when the database or Redis is away.
 */
export async function dispatch(db: Database, queue: ChunkQueue): Promise<number> {
  const capacity = await capacityOf(db)
  if (!capacity.ready) return 0
  const places = room(capacity)
  if (places === 0) return 0
  await queue.check()
  const chunks = await inTransaction(db, tx => select(db, tx, places))
  if (chunks.length === 0) return 0
  try {
    await queue.enqueue(chunks)
  }
  catch (error) {
    await db.models.Chunk.update({ state: 'ready', queuedAt: null }, { where: { id: chunks.map(chunk => chunk.chunkId), state: 'queued' } })
    throw error
  }
  return chunks.length
}

interface Backlog { userId: string, virtualTime: number, jobIds: string[] }

async function select(db: Database, tx: Transaction, places: number): Promise<Dispatched[]> {
  const backlogs = await readBacklogs(db, tx)
  const now = await virtualNow(db, tx)
  const chosen: Dispatched[] = []
  const served = new Map<string, number>()
  while (chosen.length < places) {
    const user = nextContender(backlogs, now)
    if (!user) break
    const jobId = user.jobIds[0]!
    const [chunk] = await db.sequelize.query<{ chunkId: number, attempt: number, cost: number }>(`
      SELECT id AS chunkId, attempt, predictedCpuMicros AS cost FROM chunks
      WHERE jobId = :jobId AND state = 'ready' AND id NOT IN (:taken) ORDER BY ordinal LIMIT 1 FOR UPDATE SKIP LOCKED`,
    { replacements: { jobId, taken: [0, ...chosen.map(({ chunkId }) => chunkId)] }, type: QueryTypes.SELECT, transaction: tx })
    if (!chunk) {
      user.jobIds.shift()
      if (user.jobIds.length === 0) backlogs.splice(backlogs.indexOf(user), 1)
      continue
    }
    user.virtualTime = afterServing(user.virtualTime, now, chunk.cost)
    served.set(user.userId, user.virtualTime)
    chosen.push({ chunkId: chunk.chunkId, jobId, attempt: chunk.attempt })
  }
  if (chosen.length > 0) {
    await db.models.Chunk.update({ state: 'queued', queuedAt: literal('UTC_TIMESTAMP(3)') }, { where: { id: chosen.map(({ chunkId }) => chunkId) }, transaction: tx })
  }
  // In the order of their ids, so that two transactions never wait for each other's user.
  for (const [id, virtualTimeMicros] of [...served].sort(([a], [b]) => a < b ? -1 : 1)) {
    await db.models.User.update({ virtualTimeMicros }, { where: { id }, silent: true, transaction: tx })
  }
  return chosen
}

/** Users with chunks that are ready, each with the jobs that these belong to, oldest first. */
async function readBacklogs(db: Database, tx: Transaction): Promise<Backlog[]> {
  const rows = await db.sequelize.query<{ jobId: string, userId: string, virtualTime: number }>(`
    SELECT jobs.id AS jobId, users.id AS userId, users.virtualTimeMicros AS virtualTime
    FROM jobs JOIN users ON users.id = jobs.ownerId
    WHERE jobs.state IN ('queued', 'running')
      AND EXISTS (SELECT 1 FROM chunks WHERE chunks.jobId = jobs.id AND chunks.state = 'ready')
    ORDER BY jobs.id`, { type: QueryTypes.SELECT, transaction: tx })
  const backlogs = new Map<string, Backlog>()
  for (const { jobId, userId, virtualTime } of rows) {
    const backlog = backlogs.get(userId)
    if (backlog) backlog.jobIds.push(jobId)
    else backlogs.set(userId, { userId, virtualTime, jobIds: [jobId] })
  }
  return [...backlogs.values()]
}

/**
 * Virtual time that the system has reached: where the least advanced user with chunks in flight started them, and when
 * nothing is in flight where the most advanced user of all has come.
 */
async function virtualNow(db: Database, tx: Transaction): Promise<number> {
  const [row] = await db.sequelize.query<{ now: number | null }>(`
    SELECT COALESCE(
      (SELECT MIN(starts.at) FROM (
        SELECT users.virtualTimeMicros - SUM(chunks.predictedCpuMicros) AS at
        FROM chunks JOIN jobs ON jobs.id = chunks.jobId JOIN users ON users.id = jobs.ownerId
        WHERE chunks.state IN ('queued', 'running')
        GROUP BY users.id, users.virtualTimeMicros) AS starts),
      (SELECT MAX(virtualTimeMicros) FROM users)) AS now`, { type: QueryTypes.SELECT, transaction: tx })
  return Number(row?.now ?? 0)
}
