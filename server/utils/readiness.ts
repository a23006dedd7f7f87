import { QueryTypes } from 'sequelize'
import { ENGINE_VERSION } from '#shared/physics/engine'
import { MIGRATIONS } from '../migrations'
import { HttpProblem } from './problems'
import { useServices } from './services'

/** Longest wait for the database's answer, ms: a probe must not hang on an outage. */
const PATIENCE_MS = 2000
/** Age of a heartbeat after which a worker no longer counts, s. */
const WORKER_SECONDS = 15

/**
 * What the web server can do just now. Throws `unavailable` with the cause when it can serve nobody: its database does not
 * answer, or has not been migrated for this version. Without Redis or workers it still takes jobs, which wait.
 */
export async function readiness() {
  const { db, redis } = useServices()
  const ask = async () => {
    const [row] = await db.sequelize.query<{ steps: number, workers: number }>(`
      SELECT (SELECT COUNT(*) FROM migrations) AS steps,
        (SELECT COUNT(*) FROM workers WHERE heartbeatAt > UTC_TIMESTAMP(3) - INTERVAL ${WORKER_SECONDS} SECOND) AS workers`,
    { type: QueryTypes.SELECT })
    return row
  }
  const found = await soon(ask(), PATIENCE_MS)
  if (!found) throw notReady('The database does not answer.')
  if (found.steps < MIGRATIONS.length) throw notReady('The database has not been migrated for this version.')
  const queue = redis.status === 'ready' ? 'answers' as const : 'away' as const
  return { status: 'ready' as const, engineVersion: ENGINE_VERSION, database: 'answers' as const, queue, workers: found.workers }
}

const notReady = (detail: string) => new HttpProblem('unavailable', { detail }, { 'Retry-After': '3' })

/** The value, or undefined when it fails or does not come in time. */
async function soon<T>(value: Promise<T>, withinMs: number): Promise<T | undefined> {
  let timer: NodeJS.Timeout | undefined
  const late = new Promise<undefined>((resolve) => {
    timer = setTimeout(() => resolve(undefined), withinMs)
  })
  try {
    return await Promise.race([value.catch(() => undefined), late])
  }
  finally {
    clearTimeout(timer)
  }
}
