import { describe, expect, it } from 'vitest'
import { GAMMA_0, VACUUM_PERMEABILITY } from '#shared/physics/constants'
import { criticalDensity, deriveNumbers } from '#shared/physics/derived'
import { torquePerDensity } from '#shared/physics/drive'
import { PhysicsError } from '#shared/physics/errors'
import { failuresInTime, lossWithin, neighbourField, spreadFactor, stabilityNeeded, YEAR } from '#shared/physics/retention'
import { prepareProblem } from '#shared/physics/problem'
import { cylinderFactors, ellipsoidFactors, ellipticCylinderFactors } from '#shared/physics/shape'
import type { JobSpec, JobSpecInput } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { linearModes } from '../support/dynamics'
import { WORKED_SET } from '../support/specs'

const relative = (value: number, expected: number) => Math.abs(value / expected - 1)
const tesla = (b: number) => b / VACUUM_PERMEABILITY

describe('shape factors', () => {
  it('of the elliptic cylinder 100 × 40 × 2 nm are 0.0210898719, 0.0757218796, 0.9031882485 (Beleggia et al. 2005, from memory)', () => {
    const factors = ellipticCylinderFactors(2e-9, 100e-9, 40e-9)
    expect(relative(factors[0], 0.0210898719)).toBeLessThan(2e-9)
    expect(relative(factors[1], 0.0757218796)).toBeLessThan(2e-9)
    expect(relative(factors[2], 0.9031882485)).toBeLessThan(2e-9)
  })

  it('of the elliptic cylinder become those of the circular one, thin or thick', () => {
    for (const [t, d] of [[1.4, 28], [28, 28], [100, 20]] as const) {
      const circular = cylinderFactors(t, d)
      ellipticCylinderFactors(t, d, d).forEach((factor, axis) => expect(factor).toBeCloseTo(circular[axis]!, 12))
    }
  })

  it('of the ellipsoid 3 : 2 : 1 are 0.1563006988, 0.2671540403, 0.5765452609 (Osborn, Phys. Rev. 67, 351 (1945))', () => {
    ellipsoidFactors(3, 2, 1).forEach((factor, axis) => expect(factor).toBeCloseTo([0.1563006988, 0.2671540403, 0.5765452609][axis]!, 9))
    ellipsoidFactors(5, 5, 5).forEach(factor => expect(factor).toBeCloseTo(1 / 3, 13))
  })
})

/** An in-plane cell 100 × 40 × 2 nm with its reference layer along x. */
const inPlane = (changes: { device?: object, write?: object, environment?: object } = {}): JobSpec => jobSpecSchema.parse({
  ...WORKED_SET,
  device: { ...WORKED_SET.device, anisotropy: { kind: 'inPlane', interfaceAnisotropy: 0 }, diameter: 100e-9, secondDiameter: 40e-9, thickness: 2e-9, ...changes.device },
  environment: { temperature: 300, ...changes.environment },
  write: { ...WORKED_SET.write, ...changes.write },
} as JobSpecInput)

describe('an in-plane cell', () => {
  const [nx, ny, nz] = [0.0210898719, 0.0757218796, 0.9031882485]
  const hk = (ny - nx) * 1e6
  const effective = (nz - ny) * 1e6

  it('has H_k = (N_yy − N_xx) Ms, Δ = ½ μ0 Ms H_k V/(k_B T) and M_eff = (N_zz − N_yy) Ms', () => {
    const derived = deriveNumbers(inPlane())
    expect(relative(derived.get('anisotropyField').value, hk)).toBeLessThan(1e-8)
    expect(relative(derived.get('outOfPlane').value, effective)).toBeLessThan(1e-8)
    const volume = Math.PI / 4 * 100e-9 * 40e-9 * 2e-9
    expect(relative(derived.get('stability').value, 0.5 * VACUUM_PERMEABILITY * 1e6 * hk * volume / (1.380649e-23 * 300))).toBeLessThan(1e-8)
  })

  it('has the critical density of a_J = α (H + H_k + M_eff/2) (Sun, Phys. Rev. B 62, 570 (2000)), which is where the linearised motion turns unstable', () => {
    const spec = inPlane({ device: { uniaxialField: tesla(0.02) }, environment: { appliedField: { x: tesla(0.005), y: 0, z: 0 } } })
    const threshold = 0.01 * (tesla(0.005) + tesla(0.02) + hk + effective / 2)
    const density = deriveNumbers(spec).get('criticalDensity').value
    expect(relative(density * 0.6 * torquePerDensity(1e6, 2e-9), threshold)).toBeLessThan(1e-8)
    const growth = (factor: number) => {
      const { dynamics } = prepareProblem({ ...spec, write: { ...spec.write, drive: { kind: 'currentDensity', currentDensity: factor * density } } })
      return Math.max(...linearModes(dynamics, [0, 0, 1], [[1, 0, 0], [0, 1, 0]]).real)
    }
    expect(growth(0.999)).toBeLessThan(0)
    expect(growth(1.001)).toBeGreaterThan(0)
  })

  it('rings at γ0 √(H_1 H_2)/2π (Kittel 1948, from memory)', () => {
    const spec = inPlane({ device: { damping: 1e-4 } })
    const { dynamics, rate } = prepareProblem({ ...spec, write: { ...spec.write, drive: { kind: 'current', current: 0 } } })
    const { imaginary } = linearModes(dynamics, [0, 0, 1], [[1, 0, 0], [0, 1, 0]])
    const expected = GAMMA_0 * Math.sqrt(hk * (hk + effective))
    expect(relative(Math.abs(imaginary[0]!) * rate, expected)).toBeLessThan(1e-6)
    expect(relative(deriveNumbers(spec).get('precession').value, expected / (2 * Math.PI))).toBeLessThan(1e-6)
  })

  it.each([
    ['a circular one without a uniaxial field', { secondDiameter: undefined }, ['device', 'secondDiameter']],
    ['one whose interface outweighs shape', { anisotropy: { kind: 'inPlane', interfaceAnisotropy: 2e-3 } }, ['device', 'anisotropy', 'interfaceAnisotropy']],
    ['one with its long axis along y', { secondDiameter: 120e-9 }, ['device', 'secondDiameter']],
  ])('is refused: %s', (_name, device, path) => {
    let found: unknown
    try {
      prepareProblem(inPlane({ device }))
    }
    catch (error) {
      found = error
    }
    expect(found).toBeInstanceOf(PhysicsError)
    expect((found as PhysicsError).path).toEqual(path)
  })
})

describe('a perpendicular ellipse with an in-plane uniaxial field', () => {
  it('has K_eff = K_i/t − ½ μ0 Ms² (N_zz − N_xx), less ½ μ0 Ms H_ku along the easier way', () => {
    const [nx, , nz] = ellipticCylinderFactors(1.5e-9, 60e-9, 40e-9)
    const spec = jobSpecSchema.parse({
      ...WORKED_SET,
      device: { ...WORKED_SET.device, diameter: 60e-9, secondDiameter: 40e-9, uniaxialField: tesla(0.02), anisotropy: { kind: 'interface', interfaceAnisotropy: 1.2e-3 } },
    })
    const expected = 1.2e-3 / 1.5e-9 - 0.5 * VACUUM_PERMEABILITY * 1e12 * (nz - nx) - 0.5 * 1e6 * 0.02
    expect(relative(prepareProblem(spec).numbers.anisotropyEnergy, expected)).toBeLessThan(1e-9)
  })

  it('turns unstable at a_J = α (H_1 + H_2)/2', () => {
    const base = jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, diameter: 60e-9, secondDiameter: 40e-9 } })
    const density = criticalDensity(base, prepareProblem(base).criticalField, 1)
    const growth = (factor: number) => Math.max(...linearModes(
      prepareProblem({ ...base, write: { ...base.write, drive: { kind: 'currentDensity', currentDensity: factor * density } } }).dynamics, [0, 0, 1], [[1, 0, 0], [0, 1, 0]]).real)
    expect(growth(0.999)).toBeLessThan(0)
    expect(growth(1.001)).toBeGreaterThan(0)
  })
})

describe('retention', () => {
  it('2³⁰ bits for 10 years with 1e-6 chips lost need Δ ≥ 74.90310141 at 1 GHz', () => {
    expect(relative(stabilityNeeded(2 ** 30, 10 * YEAR, 1e-6, 1e9), 74.90310141)).toBeLessThan(1e-9)
  })

  it('a spread of Δ of 3 multiplies failures by e^4.5', () => {
    expect(spreadFactor(3)).toBeCloseTo(Math.exp(4.5), 10)
  })

  it('has a loss, a FIT number and a time that belong together', () => {
    const derived = deriveNumbers(jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, diameter: 28e-9 } }))
    const rate = 1 / derived.get('retention').value
    expect(derived.get('failuresInTime').value).toBeCloseTo(failuresInTime(rate), 6)
    expect(derived.get('tenYears').value).toBeCloseTo(lossWithin(rate, 10 * YEAR), 12)
    const stability = derived.get('stability').value
    const problem = prepareProblem(jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, diameter: 28e-9 } }))
    // αγ0H_k/(1+α²)·√(Δ/π) e^−Δ is high by a few per cent at this Δ.
    expect(relative(rate, problem.tauRate * Math.sqrt(stability / Math.PI) * Math.exp(-stability))).toBeLessThan(0.05)
  })
})

describe('neighbours', () => {
  it('add up as point dipoles: (4 + √2) of one at the pitch for perpendicular moments, 6 + 1/√2 along x', () => {
    const one = 1e-18 / (4 * Math.PI * (90e-9) ** 3)
    expect(relative(neighbourField(1e-18, 90e-9, 'z'), one * (4 + Math.SQRT2))).toBeLessThan(1e-12)
    expect(relative(neighbourField(1e-18, 90e-9, 'x'), one * (6 + Math.SQRT1_2))).toBeLessThan(1e-12)
  })
})

describe('Julliere 1975', () => {
  it('P = 0.6 on both sides gives a TMR of 1.125', () => {
    const spec = jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, torque: { kind: 'symmetric', polarization: 0.6 } } })
    expect(deriveNumbers(spec).get('julliere').value).toBeCloseTo(1.125, 12)
  })
})
