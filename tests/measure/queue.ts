import { readFileSync, readdirSync } from 'node:fs'
import { join } from 'node:path'
import { QueryTypes } from 'sequelize'
import { z } from 'zod'
import { ENGINE_VERSION, planJob } from '#shared/physics/engine'
import { readSettings } from '#shared/schemas/settings'
import type { Database } from '../../server/models/database'
import { closeDatabase, openDatabase } from '../../server/models/database'
import { submitJob } from '../../server/models/submit'
import { reducedSpec } from '../support/specs'
import { TestStack } from '../integration/testStack'

export const name = 'queue: one worker of one slot, small chunks, MariaDB and Redis beside it'

const CHUNKS = 60

/** What a chunk costs beside its computing: its claim, its record, and the time until the solver has its next one. */
export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const stack = await TestStack.start('measure-queue', { webs: 0, workers: 1, env: { FARPOLE_WORKER_SLOTS: '1', FARPOLE_LOG_LEVEL: 'debug' } })
  const settings = readSettings(Object.fromEntries(Object.entries(stack.info.env).filter(([key]) => key.startsWith('FARPOLE_'))))
  const db = openDatabase({ ...settings.database, poolMax: 2 })
  try {
    const user = await db.models.User.findOne({ where: { role: 'researcher' }, rejectOnEmpty: true })
    const spec = reducedSpec({ stability: 40, drive: 4, width: 6, trials: 32 * CHUNKS, seed: 1 })
    const price = 3 / (32 * planJob(spec).stepsPerTrial)
    await db.models.CalibrationRow.upsert({ engineVersion: ENGINE_VERSION, secondsPerTrialStep: price, measuredAt: new Date() })
    const { jobId } = await submitJob(db, { userId: user.id, teamId: user.teamId, spec, idempotencyKey: 'measure' })
    const before = await statements(db)
    const job = await ended(() => db.models.Job.findByPk(jobId, { rejectOnEmpty: true }))
    const asked = await statements(db) - before
    const waited = (job.startedAt?.getTime() ?? NaN) - job.createdAt.getTime()
    const chunks = chunksIn(stack.info.logDirectory)
    const mean = (of: (chunk: Ended) => number) => chunks.reduce((sum, chunk) => sum + of(chunk), 0) / chunks.length
    const span = ((job.finishedAt?.getTime() ?? NaN) - (job.startedAt?.getTime() ?? NaN)) / job.chunksTotal
    const solve = mean(chunk => chunk.solveMs)
    return [
      { metric: 'from acceptance to the first chunk', value: waited, unit: 'ms' },
      { metric: 'a chunk, from claim to claim', value: span, unit: 'ms' },
      { metric: 'of it in the solver’s process', value: solve, unit: 'ms' },
      { metric: 'of it claiming', value: mean(chunk => chunk.claimMs), unit: 'ms' },
      { metric: 'of it recording', value: mean(chunk => chunk.recordMs), unit: 'ms' },
      { metric: 'overhead a chunk', value: span - solve, unit: 'ms' },
      { metric: 'statements a chunk, leader and watching included', value: asked / job.chunksTotal, unit: '' },
    ]
  }
  finally {
    await closeDatabase(db)
    await stack.stop()
  }
}

const endedSchema = z.looseObject({ msg: z.literal('chunk ended'), claimMs: z.number(), solveMs: z.number(), recordMs: z.number() })
type Ended = z.infer<typeof endedSchema>

/** What the worker's log says of the chunks that it has run. */
function chunksIn(directory: string): Ended[] {
  const lines = readdirSync(directory).filter(file => file.startsWith('worker')).flatMap(file => readFileSync(join(directory, file), 'utf8').split('\n'))
  return lines.filter(line => line.includes('chunk ended')).map(line => endedSchema.parse(JSON.parse(line)))
}

/** Statements that the database server has been asked so far. */
async function statements(db: Database): Promise<number> {
  const [row] = await db.sequelize.query<{ Value: string }>('SHOW GLOBAL STATUS LIKE \'Questions\'', { type: QueryTypes.SELECT })
  return Number(row?.Value)
}

async function ended<T extends { state: string }>(read: () => Promise<T>): Promise<T> {
  for (;;) {
    const job = await read()
    if (job.state !== 'queued' && job.state !== 'running') return job
    await new Promise(resolve => setTimeout(resolve, 500))
  }
}
