import type { Dynamics } from '#shared/numerics/macrospin'
import { longestStep } from '#shared/numerics/stepRule'
import { onSphere, SCHEMES } from '../support/schemes'
import type { Scheme, Vector } from '../support/schemes'

export const name = 'schemes: bias of the write error from numerical damping (i 2, τ 5), double precision'

/** Relative bias of the write error: its exponent is 2τ times the growth rate of a narrow cone over α. */
function bias(scheme: Scheme, damping: number, h: number): number {
  const [drive, reducedTime] = [2, 5]
  const dynamics: Dynamics = { damping, diagonal: [0, 0, 1], field: [0, 0, 0], reference: [0, 0, 1], torque: { q0: -drive * damping, q1: 1, q2: 0 }, fieldLikeRatio: 0, noise: 0 }
  let m: Vector = onSphere([1e-5, 0, 1])
  // Long enough to see the growth, short enough that the cone stays narrow.
  const steps = Math.max(4, Math.min(2000, Math.round(2 / (damping * h))))
  for (let k = 0; k < steps; k++) m = scheme(dynamics, m, h)
  const rate = Math.log(Math.hypot(m[0], m[1]) / 1e-5) / (steps * h)
  return -2 * reducedTime * (rate / damping - (drive - 1))
}

export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const rows: { metric: string, value: number, unit: string }[] = []
  for (const [label, scheme] of Object.entries(SCHEMES)) {
    for (const damping of [0.003, 0.01, 0.03, 0.1, 0.3]) {
      for (const h of [0.1, 0.2, 0.35, 0.5]) rows.push({ metric: `${label}, α ${damping}, ω·Δt ${h}`, value: 100 * bias(scheme, damping, h), unit: '%' })
    }
    const dynamics: Dynamics = { damping: 0.01, diagonal: [0, 0, 1], field: [0, 0, 0], reference: [0, 0, 1], torque: { q0: -0.02, q1: 1, q2: 0 }, fieldLikeRatio: 0, noise: 0 }
    let m: Vector = [0.6, 0, 0.8]
    const began = performance.now()
    for (let k = 0; k < 20_000; k++) m = scheme(dynamics, m, 0.2)
    rows.push({ metric: `${label}: one step, plain, without noise`, value: (performance.now() - began) * 1e6 / 20_000, unit: 'ns' })
  }
  for (const damping of [0.003, 0.01, 0.03, 0.1, 0.3]) {
    const { phaseStep } = longestStep(damping, 5, 1, 0.01)
    rows.push({ metric: `chosen for 1 %: ω·Δt at α ${damping}`, value: phaseStep, unit: 'rad' })
    rows.push({ metric: `its bias by numerical damping at α ${damping}`, value: 100 * bias(SCHEMES['Runge–Kutta 4']!, damping, phaseStep), unit: '%' })
  }
  return rows
}
