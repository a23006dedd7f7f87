import type { Ensemble } from './ensemble'
import type { Problem } from './problem'

/** What a job will take. */
export interface Plan {
  trials: number
  /** longest step, s */
  step: number
  /** ω Δt at the largest precession frequency */
  phaseStep: number
  stepFrom: Problem['stepFrom']
  /** expected steps of one trial */
  stepsPerTrial: number
  /** expected steps of the whole job */
  trialSteps: number
}

/** Everything the trials so far have said, in the order of the trials. */
export interface Tally {
  trials: number
  trialSteps: number
  /** s; NaN where the equator was not crossed */
  times: Float64Array
  endsNear: number
  settlesNear: number
  undecided: number
  endsFlags: Uint8Array
  paths: Float32Array
  /** null for the question of motion, whose paths are all kept */
  ensemble: Ensemble | null
}
