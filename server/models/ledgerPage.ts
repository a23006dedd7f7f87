import { QueryTypes, Transaction } from 'sequelize'
import type { LedgerPage } from '#shared/schemas/accounts'
import type { Database } from './database'
import { QUOTA_WINDOW_DAYS, quotaOf, toSeconds } from './quota'
import type { LedgerKind } from './records'

interface Row { id: number, kind: LedgerKind, cpuMicros: number, createdAt: Date, jobId: string, sentence: string | null }

/**
 * A page of a user's entries that count in the quota's window, newest first, with the balance that all of them add up to.
 * The cursor keeps the window's beginning, so that no entry falls out between two pages; entries and balance are read at
 * one moment.
 */
export async function ledgerPage(db: Database, userId: string, { cursor, limit }: { cursor: string | undefined, limit: number }): Promise<LedgerPage> {
  return db.sequelize.transaction({ isolationLevel: Transaction.ISOLATION_LEVELS.REPEATABLE_READ }, async (transaction) => {
    const balance = await quotaOf(db, userId, transaction)
    const [since, before] = cursor ? cursor.split('.').map(Number) as [number, number] : [await windowStart(db, transaction), Number.MAX_SAFE_INTEGER]
    const rows = await db.sequelize.query<Row>(`
      SELECT ledger.id, ledger.kind, ledger.cpuMicros, ledger.createdAt, ledger.jobId, jobs.sentence
      FROM ledger LEFT JOIN jobs ON jobs.id = ledger.jobId AND jobs.deletedAt IS NULL
      WHERE ledger.userId = :userId AND ledger.effectiveAt > :since AND ledger.id < :before ORDER BY ledger.id DESC LIMIT :limit`,
    { replacements: { userId, since: new Date(since), before, limit: limit + 1 }, type: QueryTypes.SELECT, transaction })
    const page = rows.slice(0, limit)
    return {
      entries: page.map(({ id, kind, cpuMicros, createdAt, jobId, sentence }) => ({
        id, at: createdAt.toISOString(), kind, cpuSeconds: toSeconds(cpuMicros), job: sentence === null ? null : { id: jobId, sentence },
      })),
      next: rows.length > limit ? `${since}.${page.at(-1)!.id}` : null,
      balance,
    }
  })
}

async function windowStart(db: Database, transaction: Transaction): Promise<number> {
  const [row] = await db.sequelize.query<{ since: Date }>(`SELECT UTC_TIMESTAMP(3) - INTERVAL ${QUOTA_WINDOW_DAYS} DAY AS since`, { type: QueryTypes.SELECT, transaction })
  if (!row) throw new Error('The database did not tell the time.')
  return row.since.getTime()
}
