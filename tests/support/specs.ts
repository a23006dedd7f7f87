import { BOLTZMANN, VACUUM_PERMEABILITY } from '#shared/physics/constants'
import { criticalDensity } from '#shared/physics/derived'
import { prepareProblem } from '#shared/physics/problem'
import type { JobSpec, JobSpecInput } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'

/** The worked set P of the reference values: Ms 1e6 A/m, d 40 nm, t 1.5 nm, μ0H_k 0.30 T, α 0.01, η 0.6, 300 K. */
export const WORKED_SET = {
  question: { kind: 'switching', trials: 1000 },
  device: {
    label: 'cell P', damping: 0.01, saturationMagnetization: 1e6,
    anisotropy: { kind: 'effectiveField', anisotropyField: 0.3 / VACUUM_PERMEABILITY },
    thickness: 1.5e-9, diameter: 40e-9, exchangeStiffness: 20e-12, torque: { kind: 'constant', efficiency: 0.6 },
    resistanceArea: 5e-12, tunnelMagnetoresistance: 1.5,
  },
  environment: { temperature: 300 },
  write: { direction: 'parallelToAntiparallel', drive: { kind: 'current', current: 60e-6 }, width: 10e-9 },
  numerics: { seed: 1 },
} satisfies JobSpecInput

export interface Reduced {
  stability: number
  /** reduced drive i */
  drive: number
  /** reduced width τ */
  width: number
  /** reduced field along z; positive holds the parallel start */
  field?: number
  damping?: number
  trials?: number
  seed?: number
  step?: JobSpecInput['numerics']['step']
}

/** The worked set scaled so that Δ, i, τ and h are as asked: a write from parallel (+z). */
export function reducedSpec({ stability, drive, width, field = 0, damping = 0.3, trials = 1000, seed = 1, step }: Reduced): JobSpec {
  const anisotropyField = WORKED_SET.device.anisotropy.anisotropyField
  const { saturationMagnetization, thickness } = WORKED_SET.device
  const temperature = WORKED_SET.environment.temperature
  const density = 0.5 * VACUUM_PERMEABILITY * saturationMagnetization * anisotropyField
  const diameter = Math.sqrt(4 / Math.PI * stability * BOLTZMANN * temperature / (density * thickness))
  const base = {
    ...WORKED_SET, device: { ...WORKED_SET.device, damping, diameter }, question: { kind: 'switching' as const, trials, failureRule: 'atPulseEnd' as const },
    environment: { temperature, appliedField: { x: 0, y: 0, z: field * anisotropyField } },
    numerics: { seed, ...(step ? { step } : {}) },
  }
  const draft = jobSpecSchema.parse(base)
  const tauUnit = 1 / prepareProblem(draft).tauRate
  return jobSpecSchema.parse({
    ...base,
    write: { direction: 'parallelToAntiparallel', drive: { kind: 'currentDensity', currentDensity: drive * criticalDensity(draft, anisotropyField, 1) }, width: width * tauUnit },
  })
}
