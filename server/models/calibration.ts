import { DEFAULT_SECONDS_PER_TRIAL_STEP, ENGINE_VERSION } from '#shared/physics/engine'
import type { Calibration } from '#shared/schemas/api'
import type { Database } from './database'

/** Price of this engine on this installation: measured when a worker has done so, else an assumption. */
export async function calibrationOf(db: Database): Promise<Calibration> {
  const row = await db.models.CalibrationRow.findByPk(ENGINE_VERSION)
  return { engineVersion: ENGINE_VERSION, secondsPerTrialStep: row?.secondsPerTrialStep ?? DEFAULT_SECONDS_PER_TRIAL_STEP }
}
