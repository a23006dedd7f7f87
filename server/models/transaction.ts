import { AsyncLocalStorage } from 'node:async_hooks'
import { QueryTypes } from 'sequelize'
import type { Transaction } from 'sequelize'
import { z } from 'zod'
import type { Database } from './database'

const RETRIES = 3
/** Deadlock victim; lock wait timeout: the whole transaction was rolled back and may run again. */
const RETRIED_ERRORS = new Set([1213, 1205])

const open = new AsyncLocalStorage<true>()

/**
 * Runs `work` in one transaction and commits it. `work` is run again, up to three times, when the database chose it
 * as a deadlock victim or it waited too long for a lock, so it must have no effect outside the transaction.
 * Never nested: an inner one would wait for a second connection of the pool, for ever when there is only one.
 */
export async function inTransaction<T>(db: Database, work: (tx: Transaction) => Promise<T>): Promise<T> {
  if (open.getStore()) throw new Error('A transaction was opened inside another one.')
  return again(() => open.run(true, () => db.sequelize.transaction(work)))
}

/** Runs `work`, up to three times more when the database undid it to end a deadlock or a wait for a lock. */
async function again<T>(work: () => Promise<T>): Promise<T> {
  for (let tries = 0; ; tries++) {
    try {
      return await work()
    }
    catch (error) {
      if (tries >= RETRIES || !RETRIED_ERRORS.has(databaseErrorNumber(error) ?? 0)) throw error
      await new Promise(resolve => setTimeout(resolve, Math.random() * 20 * 2 ** tries))
    }
  }
}

/** Error number that the database server gave, if the error came from there. */
export function databaseErrorNumber(error: unknown): number | undefined {
  for (let inner = error, depth = 0; depth < 4 && typeof inner === 'object' && inner !== null; depth++) {
    if ('errno' in inner && typeof inner.errno === 'number' && inner.errno > 0) return inner.errno
    inner = 'original' in inner ? inner.original : 'cause' in inner ? inner.cause : undefined
  }
  return undefined
}

/** What an UPDATE has done: rows changed, and the value that it gave LAST_INSERT_ID. */
export interface Written { affected: number, lastId: number }

const writtenSchema = z.object({ affectedRows: z.number(), insertId: z.number() })

/** Runs one UPDATE, by itself or in a transaction. By itself it is run again after a deadlock. */
export async function update(db: Database, sql: string, replacements: Record<string, string | number | Buffer | null>, tx?: Transaction): Promise<Written> {
  const run = async (): Promise<Written> => {
    const [done] = await db.sequelize.query(sql, { replacements, type: QueryTypes.RAW, transaction: tx ?? null })
    const { affectedRows, insertId } = writtenSchema.parse(done)
    return { affected: affectedRows, lastId: insertId }
  }
  return tx ? run() : again(run)
}
