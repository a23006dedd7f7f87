import { describe, expect, it } from 'vitest'
import { jobSpecSchema } from '#shared/schemas/job'
import { GAMMA_0, VACUUM_PERMEABILITY } from '#shared/physics/constants'
import { criticalDensity, deriveNumbers } from '#shared/physics/derived'
import { prepareProblem } from '#shared/physics/problem'
import { cylinderAxialFactor, cylinderFactors } from '#shared/physics/shape'
import { WORKED_SET } from '../support/specs'

const relative = (value: number, expected: number) => Math.abs(value / expected - 1)

describe('worked set P (formulas of the reference list, CODATA 2022)', () => {
  const spec = jobSpecSchema.parse(WORKED_SET)
  const derived = deriveNumbers(spec)
  const problem = prepareProblem(spec)

  it.each([
    ['stability', 68.2633888901],
    ['criticalCurrentToFar', 28.6375167186e-6],
    ['criticalDensity', 2.2789011718e10],
    ['tauUnit', 1.8932040998e-9],
    // RA = 5 Ω·µm², d = 40 nm, TMR 1.5
    ['parallelResistance', 3978.8736],
    ['antiparallelResistance', 9947.1839],
  ] as const)('%s is %d', (id, expected) => {
    expect(relative(derived.get(id).value, expected)).toBeLessThan(1e-8)
  })

  it('has the volume and the barrier of the list', () => {
    expect(relative(problem.numbers.volume, 1.8849555922e-24)).toBeLessThan(1e-10)
    expect(relative(problem.numbers.anisotropyEnergy * problem.numbers.volume, 2.8274333882e-19)).toBeLessThan(1e-10)
    expect(relative(GAMMA_0, 221276.146804)).toBeLessThan(1e-11)
  })

  it('gives the thermal field of Brown, Phys. Rev. 130, 1677 (1963): 15.798081023 mT for 1 ps', () => {
    // The reduced strength and back: σ_B = μ0 H_k √(noise/Δs), Δs = rate · Δt.
    const sigma = VACUUM_PERMEABILITY * problem.numbers.anisotropyField * Math.sqrt(problem.dynamics.noise / (problem.rate * 1e-12))
    expect(relative(sigma, 15.798081023e-3)).toBeLessThan(1e-9)
  })
})

describe('symmetric junction at fixed current, η = P/(1 + P² cos θ)', () => {
  it('has I_c(P→AP)/I_c(AP→P) = (1 + P²)/(1 − P²) = 2.125 at P = 0.6', () => {
    const spec = jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, torque: { kind: 'symmetric', polarization: 0.6 } } })
    const field = WORKED_SET.device.anisotropy.anisotropyField
    expect(criticalDensity(spec, field, 1) / criticalDensity(spec, field, -1)).toBeCloseTo(2.125, 12)
  })

  it('is the reduced drive that the solver sees', () => {
    const spec = jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, torque: { kind: 'symmetric', polarization: 0.6 } } })
    const problem = prepareProblem(spec)
    const density = 60e-6 / problem.numbers.area
    expect(problem.reducedDrive).toBeCloseTo(density / criticalDensity(spec, problem.numbers.anisotropyField, 1), 10)
  })
})

describe('asymmetric junction, Slonczewski 2002 (from memory)', () => {
  it('is the constant P at Λ = 1', () => {
    const spec = jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, torque: { kind: 'asymmetric', polarization: 0.6, asymmetry: 1 } } })
    expect(relative(criticalDensity(spec, WORKED_SET.device.anisotropy.anisotropyField, -1), 2.2789011718e10)).toBeLessThan(1e-9)
  })
})

describe('shape of the circular cylinder (Joseph 1966, from memory; Chen, Brug & Goldfarb 1991)', () => {
  it.each([[0.0375, 0.900434895], [1, 0.311577393]])('N_z at t/d = %d is %d', (aspect, expected) => {
    expect(cylinderAxialFactor(aspect, 1)).toBeCloseTo(expected, 9)
  })

  it('has factors that add up to one', () => {
    expect(cylinderFactors(1.4e-9, 28e-9).reduce((a, b) => a + b)).toBeCloseTo(1, 14)
  })

  it('turns K_i into H_k = 2K_i/(μ0 Ms t) − Ms(N_zz − N_xx)', () => {
    const interfaceAnisotropy = 1.2e-3
    const spec = jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, anisotropy: { kind: 'interface', interfaceAnisotropy } } })
    const nz = 0.900434895
    const expected = 2 * interfaceAnisotropy / (VACUUM_PERMEABILITY * 1e6 * 1.5e-9) - 1e6 * (nz - (1 - nz) / 2)
    expect(relative(prepareProblem(spec).numbers.anisotropyField, expected)).toBeLessThan(1e-7)
  })
})

describe('walls: σ = 4√(AK); A = 20 pJ/m, K = 1.5e5 J/m³', () => {
  it('crosses over at 58.80841551 nm; at 80 nm the wall barrier is 200.723087 and the coherent one 273.053556', () => {
    const at = (diameter: number) => deriveNumbers(jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, diameter } }))
    expect(relative(at(80e-9).get('crossoverDiameter').value, 58.80841551e-9)).toBeLessThan(1e-9)
    expect(relative(at(80e-9).get('wallBarrier').value, 200.723087)).toBeLessThan(1e-8)
    expect(relative(at(80e-9).get('stability').value, 273.053556)).toBeLessThan(1e-8)
    expect(at(80e-9).cautions.some(text => text.includes('wall'))).toBe(true)
  })
})
