import { openKernel } from '#shared/kernels/loader'
import type { KernelKind } from '#shared/kernels/loader'
import { axialWriteErrors } from '#shared/numerics/axial'
import { Rk4Stepper } from '#shared/numerics/macrospin'
import { TrialRunner } from '#shared/numerics/trial'
import type { TrialOutcome } from '#shared/numerics/trial'
import { wellSampler } from '#shared/numerics/boltzmann'
import { deterministicPath, watchedSegments } from '#shared/physics/path'
import { prepareProblem } from '#shared/physics/problem'
import { reducedSpec } from '../support/specs'

export const name = 'solver: one core, standard cell (Δ 40, i 2, τ 5, α 0.01)'

/** Best of several short runs, so that other work on the machine counts least. */
function best(repeats: number, run: () => number): number {
  return Math.min(...Array.from({ length: repeats }, run))
}

export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const spec = reducedSpec({ stability: 40, drive: 2, width: 5, damping: 0.01 })
  const problem = prepareProblem(spec)
  const watched = watchedSegments(spec, problem)
  const steps = watched.reduce((sum, s) => sum + s.steps, 0)
  const h = (watched[0]!.end - watched[0]!.start) / watched[0]!.steps

  const stepper = new Rk4Stepper(problem.dynamics, [1, 2])
  const plain = best(7, () => {
    stepper.restart(0)
    stepper.m.set([0.1, 0, Math.sqrt(0.99)])
    const began = performance.now()
    for (let k = 0; k < 50_000; k++) {
      stepper.drawNoise(h)
      stepper.step(h, 1, 1, 1)
    }
    return (performance.now() - began) * 1e6 / 50_000
  })
  const kernel = (kind: KernelKind) => {
    const runner = new TrialRunner({ dynamics: problem.dynamics, key: [1, 2], side: 1, start: wellSampler(problem.landscape, problem.nearWell), watched, settling: null }, openKernel(kind))
    const outcomes = Array.from({ length: runner.lanes }, (): TrialOutcome => ({ crossing: 0, endsNear: false, settlesNear: false, undecided: false, steps: 0 }))
    let trial = 0
    return best(9, () => {
      const groups = 20
      const began = performance.now()
      for (let n = 0; n < groups; n++, trial += runner.lanes) runner.run(trial, outcomes)
      return (performance.now() - began) * 1e6 / (groups * runner.lanes * steps)
    })
  }
  const simd = kernel('simd')
  const scalar = kernel('scalar')
  const widths = Array.from({ length: 200 }, (_, k) => (k + 1) * 0.06)
  const fokkerPlanck = best(5, () => {
    const began = performance.now()
    axialWriteErrors({ stability: 40, field: 0 }, { drive: 2 }, widths, 'afterSettling')
    return performance.now() - began
  })
  const path = best(5, () => {
    const began = performance.now()
    deterministicPath(spec)
    return performance.now() - began
  })
  return [
    { metric: 'plain TypeScript, double precision: one step of one trial', value: plain, unit: 'ns' },
    { metric: 'SIMD kernel: one step of one trial', value: simd, unit: 'ns' },
    { metric: 'scalar kernel: one step of one trial', value: scalar, unit: 'ns' },
    { metric: 'SIMD kernel against plain TypeScript', value: plain / simd, unit: '×' },
    { metric: 'SIMD kernel', value: 1e9 / simd, unit: 'trial-steps/s' },
    { metric: 'axial Fokker–Planck, 200 widths, one drive', value: fokkerPlanck, unit: 'ms' },
    { metric: 'noiseless path', value: path, unit: 'ms' },
  ]
}
