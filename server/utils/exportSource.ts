import type { Database } from '../models/database'
import type { Job } from '../models/jobs'
import { pinOf } from '../models/present'
import { specOf } from '../models/results'
import type { ExportSource } from './exportTables'
import { resultOf } from './jobs'
import { HttpProblem } from './problems'

/** What the exports of a job are made from. @throws HttpProblem conflict while no part of it is done */
export async function exportSource(db: Database, job: Job): Promise<ExportSource> {
  const result = await resultOf(db, job)
  if (!result) throw new HttpProblem('conflict', { detail: 'This job has no answer to export.' })
  return {
    sentence: job.sentence,
    spec: specOf(job),
    cpuSeconds: job.cpuMicros / 1e6,
    preset: pinOf(job),
    answer: result.answer,
    paths: result.paths,
    payloads: () => payloadsOf(db, job.id),
  }
}

/** One chunk's payload in memory at a time. */
async function* payloadsOf(db: Database, jobId: string): AsyncGenerator<Uint8Array> {
  const { Chunk } = db.models
  const done = await Chunk.findAll({ where: { jobId, state: 'done' }, attributes: ['id'], order: [['firstTrial', 'ASC']] })
  for (const { id } of done) {
    const row = await Chunk.findByPk(id, { attributes: ['payload'] })
    if (row?.payload) yield row.payload
  }
}
