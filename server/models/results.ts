import { createHash } from 'node:crypto'
import { mergeChunks } from '#shared/physics/engine'
import type { Answer, PathsLayout } from '#shared/schemas/answer'
import { answerSchema, bringsPaths } from '#shared/schemas/answer'
import { jobSpecSchema } from '#shared/schemas/job'
import type { JobSpec } from '#shared/schemas/job'
import { packArrays } from '#shared/utils/arrays'
import type { Database } from './database'
import type { Job } from './jobs'

/** SHA-256, hex: what a chunk row says of its payload. */
export const checksumOf = (payload: Uint8Array): string => createHash('sha256').update(payload).digest('hex')

const NO_PATHS: PathsLayout = { paths: 0, samples: 0, start: 0, interval: 0 }

/** The paths of an answer as one block, empty where it has none: meta is the answer's layout, one array `paths` of Float32 [path][sample][x, y, z]. */
export const packPaths = (answer: Answer, paths: Float32Array): Uint8Array => packArrays(bringsPaths(answer) ? answer.paths : NO_PATHS, { paths })

/** Specification of a stored job. Throws a ZodError on a row of another schema version. */
export const specOf = (job: Pick<Job, 'spec'>): JobSpec => jobSpecSchema.parse(JSON.parse(job.spec))

/** Stored answer of a finished job, or null. */
export const answerOf = (job: Pick<Job, 'answer'>): Answer | null => job.answer === null ? null : answerSchema.parse(JSON.parse(job.answer))

export interface Result { answer: Answer, paths: Uint8Array }

interface Cached { chunksDone: number, madeAt: number, result: Promise<Result | null> }
const FRESH_MS = 2000
const MOST_CACHED = 16
const partial = new Map<string, Cached>()

/**
 * What the chunks of a running job that are done give so far; null when there is none. A result is kept while no more
 * chunks are done, and for two seconds at least, so that many readers cost one merge.
 */
export async function partialResult(db: Database, job: Pick<Job, 'id' | 'spec' | 'chunksDone'>): Promise<Result | null> {
  if (job.chunksDone === 0) return null
  const kept = partial.get(job.id)
  if (kept && (kept.chunksDone === job.chunksDone || Date.now() - kept.madeAt < FRESH_MS)) return kept.result
  const result = mergeDone(db, job)
  partial.delete(job.id)
  partial.set(job.id, { chunksDone: job.chunksDone, madeAt: Date.now(), result })
  result.catch(() => partial.delete(job.id))
  for (const oldest of partial.keys()) {
    if (partial.size <= MOST_CACHED) break
    partial.delete(oldest)
  }
  return result
}

async function mergeDone(db: Database, job: Pick<Job, 'id' | 'spec'>): Promise<Result | null> {
  const rows = await db.models.Chunk.findAll({ where: { jobId: job.id, state: 'done' }, attributes: ['payload', 'checksum'], order: [['firstTrial', 'ASC']] })
  const parts = rows.flatMap(({ payload, checksum }) => payload && checksumOf(payload) === checksum ? [payload] : [])
  if (parts.length === 0) return null
  const { answer, paths } = mergeChunks(specOf(job), parts)
  return { answer, paths: packPaths(answer, paths) }
}
