import { axialWriteErrors } from '#shared/numerics/axial'
import { wellSampler } from '#shared/numerics/boltzmann'
import type { Dynamics } from '#shared/numerics/macrospin'
import { normalTriple } from '#shared/numerics/normal'
import { philox, STREAM, UniformStream } from '#shared/numerics/philox'
import { longestStep } from '#shared/numerics/stepRule'
import { TrialRunner } from '#shared/numerics/trial'
import type { TrialOutcome } from '#shared/numerics/trial'
import { SCHEMES } from '../support/schemes'
import type { Vector } from '../support/schemes'

export const name = 'bias of the write error by trials against Fokker–Planck (Δ 40, i 2, τ 3, on the starting side at pulse end)'

const [STABILITY, DRIVE, TAU] = [40, 2, 3]
const KEY = [20_261, 7] as const
const exact = () => axialWriteErrors({ stability: STABILITY, field: 0 }, { drive: DRIVE }, [TAU], 'atPulseEnd')[0]!

const dynamicsAt = (damping: number): Dynamics => ({
  damping, diagonal: [0, 0, 1], field: [0, 0, 0], reference: [0, 0, 1], torque: { q0: -DRIVE * damping, q1: 1, q2: 0 }, fieldLikeRatio: 0,
  noise: damping / (STABILITY * (1 + damping * damping)),
})
const sampler = () => wellSampler({ stability: STABILITY, diagonal: [0, 0, 1], field: [0, 0, 0] }, [0, 0, 1])

interface Found { share: number, error: number, nanoseconds: number }

/** The product's kernel, single precision. */
function byKernel(damping: number, step: number, trials: number): Found {
  const span = TAU / damping
  const steps = Math.ceil(span / step)
  const runner = new TrialRunner({ dynamics: dynamicsAt(damping), key: KEY, side: 1, start: sampler(), watched: [{ start: 0, end: span, from: 1, to: 1, steps }], settling: null })
  const outcomes = Array.from({ length: runner.lanes }, (): TrialOutcome => ({ crossing: 0, endsNear: false, settlesNear: false, undecided: false, steps: 0 }))
  const before = process.cpuUsage()
  let failed = 0
  for (let trial = 0; trial < trials; trial += runner.lanes) {
    runner.run(trial, outcomes)
    failed += outcomes.filter(outcome => outcome.endsNear).length
  }
  return found(failed, trials, steps, before)
}

/** A scheme as it stands in the study of growth rates, double precision, with the thermal field held over the step. */
function byScheme(label: string, damping: number, step: number, trials: number): Found {
  const scheme = SCHEMES[label]!
  const quiet = dynamicsAt(damping)
  const span = TAU / damping
  const steps = Math.ceil(span / step)
  const h = span / steps
  const scale = Math.sqrt(quiet.noise / h)
  const draw = sampler()
  const uniforms = new UniformStream(KEY, STREAM.start)
  const [start, words, gauss] = [new Float64Array(3), new Uint32Array(4), new Float64Array(3)]
  const field: Vector = [0, 0, 0]
  const dynamics: Dynamics = { ...quiet, field }
  const before = process.cpuUsage()
  let failed = 0
  for (let trial = 0; trial < trials; trial++) {
    uniforms.restart(trial)
    draw(uniforms, start)
    let m: Vector = [start[0]!, start[1]!, start[2]!]
    for (let k = 0; k < steps; k++) {
      philox(k, STREAM.noise, trial, 0, KEY[0], KEY[1], words)
      normalTriple(words, gauss)
      for (let axis = 0; axis < 3; axis++) field[axis] = scale * gauss[axis]!
      m = scheme(dynamics, m, h)
    }
    if (m[2] > 0) failed++
  }
  return found(failed, trials, steps, before)
}

function found(failed: number, trials: number, steps: number, before: NodeJS.CpuUsage): Found {
  const share = failed / trials
  return { share, error: Math.sqrt(share * (1 - share) / trials), nanoseconds: process.cpuUsage(before).user * 1e3 / (trials * steps) }
}

export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const truth = exact()
  const rows = [{ metric: 'Fokker–Planck', value: truth, unit: '' }]
  const put = (label: string, { share, error, nanoseconds }: Found) => rows.push(
    { metric: `${label}: bias`, value: 100 * (share / truth - 1), unit: '%' },
    { metric: `${label}: its standard error`, value: 100 * error / truth, unit: '%' },
    { metric: `${label}: one step of one trial`, value: nanoseconds, unit: 'ns' },
  )
  for (const [damping, trials] of [[0.003, 100_000], [0.01, 200_000], [0.03, 200_000], [0.1, 200_000], [0.3, 200_000]] as const) {
    // ω is the largest rate of turning, drive included, as in a job.
    const { phaseStep } = longestStep(damping, TAU, DRIVE - 1, 0.01)
    put(`kernel, α ${damping}, step of the rule (ω·Δt ${phaseStep.toFixed(3)})`, byKernel(damping, phaseStep / (1 + DRIVE * damping), trials))
  }
  put('kernel, α 0.01, ω·Δt 0.5', byKernel(0.01, 0.5, 200_000))
  for (const [label, step, trials] of [['Heun', 0.175, 6000], ['semi-implicit midpoint (Cayley)', 0.35, 10_000], ['Runge–Kutta 4', 0.35, 10_000], ['Lie group 4, commutator-free', 0.5, 10_000]] as const) {
    put(`${label}, α 0.01, ω·Δt ${step}`, byScheme(label, 0.01, step, trials))
  }
  return rows
}
