import { QueryTypes, literal } from 'sequelize'
import type { Database } from '../models/database'
import type { Claim } from './claim'

/** How a running chunk stands. */
export interface Beat extends Claim {
  /** 0 to 1 */
  progress: number
  cpuMicros: number
}

/** Says that chunks are still being run, how far they are and what they have used so far. */
export async function beat(db: Database, beats: readonly Beat[]): Promise<void> {
  for (const { chunkId, attempt, progress, cpuMicros } of beats) {
    const [alive] = await db.models.Chunk.update({ heartbeatAt: literal('UTC_TIMESTAMP(3)'), progress: Math.round(1000 * progress) }, {
      where: { id: chunkId, attempt, state: 'running' },
    })
    if (alive > 0) await db.models.Attempt.update({ cpuMicros: Math.round(cpuMicros) }, { where: { chunkId, attempt, outcome: 'running' } })
  }
}

/** A claim to be stopped. `unwanted`: its job was cancelled or has failed; `fenced`: its chunk was handed to another worker. */
export interface Unwanted { claim: Claim, why: 'unwanted' | 'fenced' }

/** Those of the claims that are to be stopped. */
export async function unwantedClaims(db: Database, claims: readonly Claim[]): Promise<Unwanted[]> {
  if (claims.length === 0) return []
  const rows = await db.sequelize.query<{ chunkId: number, attempt: number, state: string, jobState: string }>(`
    SELECT chunks.id AS chunkId, chunks.attempt AS attempt, chunks.state AS state, jobs.state AS jobState
    FROM chunks JOIN jobs ON jobs.id = chunks.jobId WHERE chunks.id IN (:ids)`,
  { replacements: { ids: claims.map(claim => claim.chunkId) }, type: QueryTypes.SELECT })
  const unwanted: Unwanted[] = []
  for (const claim of claims) {
    const row = rows.find(({ chunkId }) => chunkId === claim.chunkId)
    if (!row || row.attempt !== claim.attempt || row.state !== 'running') unwanted.push({ claim, why: 'fenced' })
    else if (row.jobState !== 'running' && row.jobState !== 'queued') unwanted.push({ claim, why: 'unwanted' })
  }
  return unwanted
}
