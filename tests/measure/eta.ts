import { setTimeout as sleep } from 'node:timers/promises'
import { ENGINE_VERSION, planJob } from '#shared/physics/engine'
import { readSettings } from '#shared/schemas/settings'
import type { Database } from '../../server/models/database'
import { closeDatabase, openDatabase } from '../../server/models/database'
import { submitJob } from '../../server/models/submit'
import { scoredPredictions } from '../../server/queue/outlooks'
import { reducedSpec } from '../support/specs'
import { TestStack } from '../integration/testStack'

export const name = 'ends foretold: jobs of two people on one worker of two slots, after the demo’s own'

const JOBS = 40
/** CPU-seconds that a job is priced at, shortest and longest. */
const PRICES = [0.3, 6] as const
/** Mean time between two jobs, s. */
const PAUSE = 1.5
const WITHIN_MS = 600_000

/** How many jobs end within the range that was stated for 80 % of them, at each stage of their lives. */
export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const stack = await TestStack.start('measure-eta', { webs: 0, workers: 1, env: { FARPOLE_WORKER_SLOTS: '2' }, seed: ['--seed-demo'] })
  const settings = readSettings(Object.fromEntries(Object.entries(stack.info.env).filter(([key]) => key.startsWith('FARPOLE_'))))
  const db = openDatabase({ ...settings.database, poolMax: 2 })
  try {
    await queueMix(db)
    const deadline = performance.now() + WITHIN_MS
    while (await db.models.Job.count({ where: { state: ['queued', 'running'] } }) > 0) {
      if (performance.now() > deadline) throw new Error('The jobs did not end in time.')
      await sleep(1000)
    }
    const scored = await scoredPredictions(db, 10_000)
    const waiting = scored.filter(({ stage }) => stage === 0)
    const running = scored.filter(({ stage }) => stage > 0)
    return [
      { metric: 'jobs', value: await db.models.Job.count({ where: { state: 'done' } }), unit: '' },
      ...figures('all stages', scored), ...figures('while waiting', waiting), ...figures('while running', running),
    ]
  }
  finally {
    await closeDatabase(db)
    await stack.stop()
  }
}

type Prediction = Awaited<ReturnType<typeof scoredPredictions>>[number]

function figures(what: string, some: readonly Prediction[]) {
  const share = (test: (one: Prediction) => boolean) => 100 * some.filter(test).length / some.length
  const mean = (of: (one: Prediction) => number) => some.reduce((sum, one) => sum + of(one), 0) / some.length
  return [
    { metric: `${what}: ranges stated`, value: some.length, unit: '' },
    { metric: `${what}: ended inside`, value: share(({ low, high, actual }) => actual >= low && actual <= high), unit: '%' },
    { metric: `${what}: ended later`, value: share(({ high, actual }) => actual > high), unit: '%' },
    { metric: `${what}: mean width`, value: mean(({ low, high }) => high - low), unit: 's' },
    { metric: `${what}: mean time left`, value: mean(({ actual }) => actual), unit: 's' },
  ]
}

/** Jobs of all lengths from two people, at times of their own. */
async function queueMix(db: Database): Promise<void> {
  const people = await db.models.User.findAll({ where: { role: 'researcher' }, order: [['id', 'ASC']], limit: 2 })
  // A fixed sequence, so that two runs ask the same.
  let state = 12_345
  const draw = () => (state = (state * 1_103_515_245 + 12_345) % 2 ** 31) / 2 ** 31
  for (let k = 0; k < JOBS; k++) {
    const user = people[Math.floor(draw() * people.length)]!
    const shape = reducedSpec({ stability: 30 + 30 * draw(), drive: 1.5 + 2 * draw(), width: 3 + 5 * draw(), damping: 0.02 + 0.1 * draw(), trials: 10, seed: k })
    const seconds = PRICES[0] * (PRICES[1] / PRICES[0]) ** draw()
    const row = await db.models.CalibrationRow.findByPk(ENGINE_VERSION)
    const trials = Math.max(10, Math.round(seconds / ((row?.secondsPerTrialStep ?? 5e-8) * planJob(shape).stepsPerTrial)))
    const spec = { ...shape, question: { kind: 'switching' as const, trials: Math.min(1_000_000, trials), failureRule: 'atPulseEnd' as const } }
    await submitJob(db, { userId: user.id, teamId: user.teamId, spec, idempotencyKey: `measure-eta-${k}` })
    await sleep(-1000 * PAUSE * Math.log(1 - draw()))
  }
}
