import { ENGINE_VERSION } from '#shared/physics/engine'
import type { Database } from '../server/models/database'
import type { Logger } from './log'
import { patiently } from './patience'
import { Solver } from './solver'

const CPU_LIMIT_SECONDS = 60

/** Measures the price of this engine on this machine, once for an installation: the first worker's figure stands. */
export async function calibrateOnce(db: Database, script: string, log: Logger, stop: AbortSignal): Promise<void> {
  if (await patiently(() => db.models.CalibrationRow.count({ where: { engineVersion: ENGINE_VERSION } }), stop) > 0) return
  const solver = new Solver(script)
  const outcome = await solver.perform({ kind: 'calibrate' }, CPU_LIMIT_SECONDS)
  solver.close()
  if (outcome.kind !== 'calibrate') return log.warn({ outcome: outcome.kind }, 'the price could not be measured')
  const { secondsPerTrialStep } = outcome
  await patiently(() => db.sequelize.query(
    'INSERT IGNORE INTO calibrations (engineVersion, secondsPerTrialStep, measuredAt) VALUES (:version, :secondsPerTrialStep, UTC_TIMESTAMP(3))',
    { replacements: { version: ENGINE_VERSION, secondsPerTrialStep } }), stop)
  log.info({ engineVersion: ENGINE_VERSION, secondsPerTrialStep }, 'price measured')
}
