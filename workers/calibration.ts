import { z } from 'zod'
import { openChunk } from '#shared/physics/engine'
import { jobSpecSchema } from '#shared/schemas/job'
import { unpackArrays } from '#shared/utils/arrays'

const STANDARD_TRIALS = 400

/** The job whose trials set the price: an ordinary cell and pulse, as most jobs are. */
const STANDARD = jobSpecSchema.parse({
  question: { kind: 'switching', trials: STANDARD_TRIALS },
  device: {
    label: 'Standard', damping: 0.01, saturationMagnetization: 1.05e6,
    anisotropy: { kind: 'effectiveField', anisotropyField: 2.7e5 },
    thickness: 1.4e-9, diameter: 28e-9, exchangeStiffness: 18e-12, torque: { kind: 'constant', efficiency: 0.55 },
    resistanceArea: 6e-12, tunnelMagnetoresistance: 1.4,
  },
  environment: { temperature: 358 },
  write: { direction: 'parallelToAntiparallel', drive: { kind: 'current', current: 32e-6 }, width: 5e-9, edge: 0.3e-9 },
  numerics: { seed: 1 },
})

const SAMPLES = 7
const SAMPLE_MICROS = 120_000
const metaSchema = z.looseObject({ trialSteps: z.int().min(1) })

/**
 * CPU-seconds that one step of one trial takes in this process: the median of several short runs after one that warms up.
 * Opening a run is not counted: the price of a job has that apart. Takes about a second.
 */
export function measurePrice(): number {
  sample()
  const prices = Array.from({ length: SAMPLES }, sample).sort((a, b) => a - b)
  return prices[(SAMPLES - 1) / 2]!
}

function sample(): number {
  let micros = 0
  let steps = 0
  while (micros < SAMPLE_MICROS) {
    const run = openChunk(STANDARD, 0, STANDARD_TRIALS)
    const before = process.cpuUsage()
    while (run.done < run.total) run.advance()
    const { user, system } = process.cpuUsage(before)
    micros += user + system
    steps += metaSchema.parse(unpackArrays(run.finish()).meta).trialSteps
  }
  return micros / 1e6 / steps
}
