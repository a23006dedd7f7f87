import type { JobSpec } from '../schemas/job'
import { frameAround, wellSampler } from '../numerics/boltzmann'
import type { WellSampler } from '../numerics/boltzmann'
import type { TrialPlan } from '../numerics/trial'
import type { Problem } from './problem'

type Triple = [number, number, number]

/** Where the path without noise starts, in the solver's frame: at the well's rms angle and φ = 0, or where all trials do. */
export function quietStart(spec: JobSpec, problem: Problem): { m: Triple, angle: number } {
  const { start } = spec
  if (start?.kind === 'fixedAngle') return { m: atAngle(start, problem.side), angle: start.angle }
  const { nearWell, rmsAngle } = problem
  const { first } = frameAround(nearWell)
  const [cosine, sine] = [Math.cos(rmsAngle), Math.sin(rmsAngle)]
  return { m: [cosine * nearWell[0] + sine * first[0], cosine * nearWell[1] + sine * first[1], cosine * nearWell[2] + sine * first[2]], angle: rmsAngle }
}

const atAngle = ({ angle, azimuth }: { angle: number, azimuth: number }, side: 1 | -1): Triple =>
  [Math.sin(angle) * Math.cos(azimuth), Math.sin(angle) * Math.sin(azimuth), side * Math.cos(angle)]

const always = (m: Triple): WellSampler => (_uniforms, out) => out.set(m)

/** How the trials of a job start, for the runner: what is drawn, and the undriven time before the pulse. */
export function trialStart(spec: JobSpec, problem: Problem): Required<Pick<TrialPlan, 'start' | 'before'>> {
  const { start } = spec
  if (start?.kind === 'fixedAngle') return { start: always(atAngle(start, problem.side)), before: null }
  if (start?.kind === 'thermalised') return { start: always(problem.nearWell), before: { span: start.duration * problem.rate, steps: thermalisingSteps(spec, problem) } }
  return { start: wellSampler(problem.landscape, problem.nearWell), before: null }
}

/** Undriven steps of a trial before its pulse. */
export const thermalisingSteps = ({ start }: JobSpec, problem: Problem): number =>
  start?.kind === 'thermalised' ? Math.max(1, Math.ceil(start.duration / problem.step * (1 - 1e-12))) : 0
