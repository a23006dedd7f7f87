import { ENGINE_VERSION, planJob } from '#shared/physics/engine'
import { readSettings } from '#shared/schemas/settings'
import { closeDatabase, openDatabase } from '../../server/models/database'
import { submitJob } from '../../server/models/submit'
import { reducedSpec } from '../support/specs'
import { TestStack } from '../integration/testStack'

export const name = 'queue: one worker of one slot, small chunks, MariaDB and Redis beside it'

const CHUNKS = 60

/** What a chunk costs beside its computing: from the claim of a job's first chunk to its stored answer, per chunk. */
export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const stack = await TestStack.start('measure-queue', { webs: 0, workers: 1, env: { FARPOLE_WORKER_SLOTS: '1' } })
  const settings = readSettings(Object.fromEntries(Object.entries(stack.info.env).filter(([key]) => key.startsWith('FARPOLE_'))))
  const db = openDatabase({ ...settings.database, poolMax: 2 })
  try {
    const user = await db.models.User.findOne({ where: { role: 'researcher' }, rejectOnEmpty: true })
    const spec = reducedSpec({ stability: 40, drive: 4, width: 6, trials: 32 * CHUNKS, seed: 1 })
    const price = 3 / (32 * planJob(spec).stepsPerTrial)
    await db.models.CalibrationRow.upsert({ engineVersion: ENGINE_VERSION, secondsPerTrialStep: price, measuredAt: new Date() })
    const { jobId } = await submitJob(db, { userId: user.id, teamId: user.teamId, spec, idempotencyKey: 'measure' })
    const job = await ended(() => db.models.Job.findByPk(jobId, { rejectOnEmpty: true }))
    const wall = ((job.finishedAt?.getTime() ?? NaN) - (job.startedAt?.getTime() ?? NaN)) / job.chunksTotal
    const cpu = job.cpuMicros / 1000 / job.chunksTotal
    const waited = ((job.startedAt?.getTime() ?? NaN) - job.createdAt.getTime())
    return [
      { metric: 'from acceptance to the first chunk', value: waited, unit: 'ms' },
      { metric: 'a chunk, from claim to claim', value: wall, unit: 'ms' },
      { metric: 'of it computing', value: cpu, unit: 'ms' },
      { metric: 'of it overhead', value: wall - cpu, unit: 'ms' },
    ]
  }
  finally {
    await closeDatabase(db)
    await stack.stop()
  }
}

async function ended<T extends { state: string }>(read: () => Promise<T>): Promise<T> {
  for (;;) {
    const job = await read()
    if (job.state !== 'queued' && job.state !== 'running') return job
    await new Promise(resolve => setTimeout(resolve, 100))
  }
}
