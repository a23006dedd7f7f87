import { describe, expect, it } from 'vitest'
import { jobSpecSchema } from '#shared/schemas/job'
import { GAMMA_0, VACUUM_PERMEABILITY } from '#shared/physics/constants'
import { deterministicPath } from '#shared/physics/path'
import { prepareProblem } from '#shared/physics/problem'
import { Rk4Stepper } from '#shared/numerics/macrospin'
import { integrate, linearModes, quiet, zeroOf } from '../support/dynamics'
import { reducedSpec, WORKED_SET } from '../support/specs'

const relative = (value: number, expected: number) => Math.abs(value / expected - 1)

describe('precession without damping: γ0(H + H_k cos θ)/2π', () => {
  it('is 10.0835910907 GHz at θ = 30°, 0.1 T along z, μ0H_k = 0.3 T', () => {
    const scale = 0.3 / VACUUM_PERMEABILITY
    const theta = Math.PI / 6
    const rate = GAMMA_0 * scale
    const time = 0.7e-10
    const m = integrate(quiet({ damping: 0, field: [0, 0, 0.1 / 0.3] }), [Math.sin(theta), 0, Math.cos(theta)], time * rate)
    // Less than one turn: the azimuth tells the frequency.
    const angle = (Math.atan2(m[1]!, m[0]!) + 2 * Math.PI) % (2 * Math.PI)
    expect(relative(angle / (2 * Math.PI * time), 10.0835910907e9)).toBeLessThan(1e-10)
    expect(m[2]).toBeCloseTo(Math.cos(theta), 11)
  })
})

describe('in-plane mode, N = (0.02, 0.05, 0.93), Ms = 1e6 A/m, 0.02 T uniaxial + 0.005 T along x (Kittel, Phys. Rev. 73, 155 (1948), from memory)', () => {
  const ms = 1e6
  const inPlane = (damping: number) => quiet({
    damping, diagonal: [0.02 / VACUUM_PERMEABILITY / ms - 0.02, -0.05, -0.93], field: [0.005 / VACUUM_PERMEABILITY / ms, 0, 0],
  })
  const tangent: [number[], number[]] = [[0, 1, 0], [0, 0, 1]]

  it('rings at 7.5857286422 GHz without damping', () => {
    const { imaginary } = linearModes(inPlane(0), [1, 0, 0], tangent)
    expect(relative(Math.abs(imaginary[0]!) * GAMMA_0 * ms / (2 * Math.PI), 7.5857286422e9)).toBeLessThan(1e-8)
  })

  it('decays at −2.1671718926e9 s⁻¹ and rings at 7.5763648141 GHz with α = 0.02', () => {
    const { real, imaginary } = linearModes(inPlane(0.02), [1, 0, 0], tangent)
    const rate = GAMMA_0 * ms / (1 + 0.02 ** 2)
    expect(relative(real[0]! * rate, -2.1671718926e9)).toBeLessThan(1e-8)
    expect(relative(Math.abs(imaginary[0]!) * rate / (2 * Math.PI), 7.5763648141e9)).toBeLessThan(1e-8)
  })

  it('turns unstable at a_J = 4898.94367889 A/m with α = 0.01 (Sun, Phys. Rev. B 62, 570 (2000))', () => {
    const growth = (a: number) => Math.max(...linearModes({ ...inPlane(0.01), reference: [-1, 0, 0], torque: { q0: a / ms, q1: 1, q2: 0 } }, [1, 0, 0], tangent).real)
    expect(relative(zeroOf(growth, 1000, 20000), 4898.94367889)).toBeLessThan(1e-6)
  })
})

describe('perpendicular threshold: a_J = α H_k (1 + h)/(1 + α b_J/a_J)', () => {
  it('is 0.997008973081 α H_k for b_J = 0.3 a_J, α = 0.01', () => {
    // Start at +z, p = +z, negative drive.
    const growth = (a: number) => Math.max(...linearModes(quiet({ torque: { q0: -a * 0.01, q1: 1, q2: 0 }, fieldLikeRatio: 0.3 }), [0, 0, 1], [[1, 0, 0], [0, 1, 0]]).real)
    expect(relative(zeroOf(growth, 0.5, 2), 0.997008973081)).toBeLessThan(1e-7)
  })
})

describe('motion under a constant axial field (Kikuchi 1956, Mallinson 1987, from memory)', () => {
  it('reaches m_z = 0.999771020528 from 170° in 2 ns at 0.2 T, α = 0.1', () => {
    const rate = GAMMA_0 * 0.2 / VACUUM_PERMEABILITY / (1 + 0.01)
    const theta = 170 * Math.PI / 180
    const m = integrate(quiet({ damping: 0.1, diagonal: [0, 0, 0], field: [0, 0, 1] }), [Math.sin(theta), 0, Math.cos(theta)], 2e-9 * rate)
    expect(m[2]).toBeCloseTo(0.999771020528, 11)
  })
})

describe('switching time under a collinear drive (exact T = 0 form; Butler et al., IEEE Trans. Magn. 48, 4684 (2012))', () => {
  it.each([[2, 0, 2.67110405888], [1.5, 0, 4.83678408962], [2, 0.2, 3.24563220760]])('i = %d, h = %d: τ = %d from 5° to 90°', (drive, field, expected) => {
    const damping = 0.1
    const theta = 5 * Math.PI / 180
    let crossing = NaN
    integrate(quiet({ damping, field: [0, 0, field], torque: { q0: -drive * damping, q1: 1, q2: 0 } }), [Math.sin(theta), 0, Math.cos(theta)], 1.2 * expected / damping, (before, now, m, dense) => {
      if (Number.isNaN(crossing) && m[2]! < 0) crossing = zeroOf(s => dense(2, s), before, now)
    })
    expect(relative(crossing * damping, expected)).toBeLessThan(1e-9)
  })

  it('is what the noiseless path of a job takes from its own start', () => {
    const spec = reducedSpec({ stability: 60, drive: 2, width: 8, damping: 0.02 })
    const problem = prepareProblem(spec)
    const path = deterministicPath(spec)
    const form = (theta: number) => (2 * Math.log(Math.tan(theta / 2)) + Math.log(Math.sin(theta)) - Math.log(Math.abs(2 - Math.cos(theta)))) / 3
    expect(relative(path.crossing! * problem.tauRate, form(Math.PI / 2) - form(problem.rmsAngle))).toBeLessThan(1e-8)
    expect(path.endsFar).toBe(true)
    // ⟨θ²⟩ of exp(Δ cos²θ) near a pole: 1/Δ to first order.
    expect(relative(problem.rmsAngle, 1 / Math.sqrt(60))).toBeLessThan(0.02)
  })
})

describe('signs: a positive drive pulls towards +p', () => {
  const ends = (direction: 'parallelToAntiparallel' | 'antiparallelToParallel') => {
    const path = deterministicPath(jobSpecSchema.parse({ ...WORKED_SET, write: { direction, drive: { kind: 'current', current: 90e-6 }, width: 20e-9, edge: 1e-9 } }))
    return { start: path.m[2]!, end: path.m[path.m.length - 1]!, first: path.time[0]!, last: path.time[path.time.length - 1]! }
  }
  it('writes antiparallel from parallel and parallel from antiparallel, on a clock that starts at half amplitude', () => {
    const down = ends('parallelToAntiparallel')
    expect(down.start).toBeGreaterThan(0.9)
    expect(down.end).toBeLessThan(-0.9)
    const up = ends('antiparallelToParallel')
    expect(up.start).toBeLessThan(-0.9)
    expect(up.end).toBeGreaterThan(0.9)
    expect(down.first).toBeCloseTo(-0.5e-9, 15)
    expect(down.last).toBeCloseTo(20.5e-9, 15)
  })

  it('does not switch below the critical drive', () => {
    expect(deterministicPath(reducedSpec({ stability: 60, drive: 0.9, width: 20, damping: 0.05 })).crossing).toBeNull()
  })
})

describe('the fourth-order stepper without noise', () => {
  const endOf = (steps: number) => {
    const stepper = new Rk4Stepper(quiet({ damping: 0.05, field: [0.1, 0.05, 0.2], torque: { q0: -0.12, q1: 1, q2: 0.36 }, fieldLikeRatio: 0.2, reference: [0.6, 0, 0.8] }), [0, 0])
    stepper.m.set([0.6, 0, 0.8])
    for (let k = 0; k < steps; k++) stepper.step(20 / steps, 1, 1, 1)
    return [...stepper.m]
  }
  const exact = integrate(quiet({ damping: 0.05, field: [0.1, 0.05, 0.2], torque: { q0: -0.12, q1: 1, q2: 0.36 }, fieldLikeRatio: 0.2, reference: [0.6, 0, 0.8] }), [0.6, 0, 0.8], 20)
  const error = (steps: number) => Math.hypot(...endOf(steps).map((c, axis) => c - exact[axis]!))

  it('agrees with odex and gains a factor of sixteen for each halving of the step', () => {
    expect(error(1600)).toBeLessThan(1e-7)
    const order = Math.log2(error(200) / error(400))
    expect(order).toBeGreaterThan(3.7)
    expect(order).toBeLessThan(5.3)
  })

  it('keeps the norm', () => {
    expect(Math.hypot(...endOf(300))).toBeCloseTo(1, 14)
  })
})
