import { describe, expect, it } from 'vitest'
import { BOLTZMANN, VACUUM_PERMEABILITY } from '#shared/physics/constants'
import { deviceNumbers, materialAt, shapeFactors } from '#shared/physics/device'
import { Junction } from '#shared/physics/drive'
import { PhysicsError } from '#shared/physics/errors'
import { deriveNumbers } from '#shared/physics/derived'
import { prepareProblem } from '#shared/physics/problem'
import { driftOf, responseOf, STAGE, STAGE_LENGTH } from '#shared/numerics/macrospin'
import type { JobSpec, JobSpecInput } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { WORKED_SET } from '../support/specs'

const relative = (value: number, expected: number) => Math.abs(value / expected - 1)
const job = (device: object = {}, write: object = {}): JobSpec =>
  jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, ...device }, write: { ...WORKED_SET.write, drive: { kind: 'voltage', voltage: 0.5 }, ...write } } as JobSpecInput)
const junctionOf = (spec: JobSpec) => new Junction(spec, deviceNumbers(spec))
/** a_J in A/m at cos θ under the full drive, as the solver has it. */
function torqueAt(spec: JobSpec, cosine: number): number {
  const { dynamics, numbers } = prepareProblem(spec)
  const row = new Float64Array(STAGE_LENGTH)
  responseOf(dynamics)(1, row)
  return numbers.anisotropyField * row[STAGE.a]! / Math.max(row[STAGE.q1]! + row[STAGE.q2]! * cosine, row[STAGE.r1]! + row[STAGE.r2]! * cosine)
}

describe('the junction: RA 5 Ω·µm², d 40 nm, TMR 1.5', () => {
  it('has R_P 3978.8736, R(90°) 5684.1051, R_AP 9947.1839 Ω: conductance, not resistance, is linear in cos θ', () => {
    const junction = junctionOf(job())
    const resistance = (cosine: number) => junction.at(1, cosine).voltage / junction.at(1, cosine).current
    expect(relative(resistance(1), 3978.8736)).toBeLessThan(1e-8)
    expect(relative(resistance(0), 5684.1051)).toBeLessThan(1e-8)
    expect(relative(resistance(-1), 9947.1839)).toBeLessThan(1e-8)
  })

  it('shares a voltage with a resistance in series, and the torque follows its share at every angle', () => {
    const spec = job({}, { seriesResistance: 2000 })
    const junction = junctionOf(spec)
    const free = torqueAt(job(), 0)
    for (const cosine of [1, 0.3, -1]) {
      const { voltage, current } = junction.at(1, cosine)
      expect(voltage + 2000 * current).toBeCloseTo(-0.5, 12)
      expect(relative(torqueAt(spec, cosine) / free, voltage / -0.5)).toBeLessThan(1e-12)
    }
  })

  it('draws no more than the limit: the torque is that of the smaller share at every angle', () => {
    // 0.5 V draw 126 µA parallel and 50 µA antiparallel.
    const spec = job({}, { currentLimit: 80e-6 })
    const junction = junctionOf(spec)
    expect(junction.at(1, 1).current).toBeCloseTo(-80e-6, 15)
    expect(relative(junction.at(1, -1).current, -0.5 / 9947.1839)).toBeLessThan(1e-8)
    const free = torqueAt(job(), 0)
    for (const cosine of [1, 0.2, 0, -0.6, -1]) expect(relative(torqueAt(spec, cosine) / free, junction.at(1, cosine).voltage / -0.5)).toBeLessThan(1e-12)
  })

  it('loses TMR with the voltage at constant R_P: half of it at V_half', () => {
    const junction = junctionOf(job({ halfVoltage: 0.5 }))
    const at = (cosine: number) => junction.at(1, cosine).voltage / junction.at(1, cosine).current
    expect(relative(at(1), 3978.8736)).toBeLessThan(1e-8)
    expect(relative(at(-1), 3978.8736 * 1.75)).toBeLessThan(1e-8)
  })

  it('refuses a current beyond the limit', () => {
    expect(() => prepareProblem(job({}, { drive: { kind: 'current', current: 90e-6 }, currentLimit: 80e-6 }))).toThrow(PhysicsError)
  })

  it('takes V I (t_p − t_e/3) over a trapezoid', () => {
    const energy = deriveNumbers(job({}, { width: 5e-9, edge: 1e-9 })).get('energy').value
    expect(relative(energy, 0.25 / 3978.8736 * (5e-9 - 1e-9 / 3))).toBeLessThan(1e-8)
  })
})

describe('what else the voltage does', () => {
  it('changes the anisotropy by 2ΔK_i/(μ0 Ms t) with ΔK_i = −ξ V/t_b: a write to parallel lowers it, one to antiparallel raises it', () => {
    for (const [direction, sign] of [['antiparallelToParallel', -1], ['parallelToAntiparallel', 1]] as const) {
      const spec = job({ voltageAnisotropy: 60e-15, barrierThickness: 1e-9 }, { direction })
      const { dynamics, numbers } = prepareProblem(spec)
      const row = new Float64Array(STAGE_LENGTH)
      responseOf(dynamics)(1, row)
      const change = 2 * 60e-15 * 0.5 / (1e-9 * VACUUM_PERMEABILITY * 1e6 * 1.5e-9)
      expect(relative((row[STAGE.z]! - row[STAGE.x]! - 1) * numbers.anisotropyField, sign * change)).toBeLessThan(1e-9)
    }
    expect(() => prepareProblem(job({ voltageAnisotropy: 60e-15 }))).toThrow('thickness of the barrier')
  })

  it('adds b₂ V² to the field-like torque, whatever the sign of V', () => {
    for (const direction of ['antiparallelToParallel', 'parallelToAntiparallel'] as const) {
      const { dynamics, numbers } = prepareProblem(job({ fieldLikeQuadratic: 4e4 }, { direction }))
      const slope = [0, 0, 0]
      driftOf(dynamics)([1, 0, 0], 1, slope)
      const without = [0, 0, 0]
      driftOf(prepareProblem(job({}, { direction })).dynamics)([1, 0, 0], 1, without)
      // −m × (b p) has the y component +b for m = x, p = z.
      expect(relative((slope[1]! - without[1]!) * numbers.anisotropyField, 4e4 * 0.25)).toBeLessThan(1e-9)
    }
  })

  it('heats by R_th V² at the mean conductance, which raises the noise and softens the layer', () => {
    const laws = { thermalResistance: 1e6, magnetizationTemperature: 1200, anisotropyExponent: 2.2, materialTemperature: 300, tmrSlope: 1e-3 }
    const spec = job(laws)
    const { temperature, voltage, mean } = junctionOf(spec).working(1)
    expect(relative(temperature, 300 + 1e6 * voltage * voltage * mean)).toBeLessThan(1e-9)
    expect(temperature).toBeGreaterThan(330)
    const { dynamics, numbers } = prepareProblem(spec)
    const [still, driven] = [0, 1].map((drive) => {
      const row = new Float64Array(STAGE_LENGTH)
      responseOf(dynamics)(drive, row)
      return row
    }) as [Float64Array, Float64Array]
    const hot = materialAt(spec.device, shapeFactors(spec.device), temperature)
    expect(relative(still[STAGE.noise]!, dynamics.noise)).toBeLessThan(1e-12)
    expect(relative(driven[STAGE.noise]! / still[STAGE.noise]!, temperature / 300 * 1e6 / hot.saturationMagnetization)).toBeLessThan(1e-9)
    expect(driven[STAGE.z]! - driven[STAGE.x]!).toBeLessThan(still[STAGE.z]! - still[STAGE.x]!)
    // Noise in units of the field scale: 2α kB T/(μ0 Ms V H_s (1+α²)).
    expect(relative(still[STAGE.noise]!, 2 * 0.01 * BOLTZMANN * 300 / (VACUUM_PERMEABILITY * 1e6 * numbers.volume * numbers.anisotropyField * 1.0001))).toBeLessThan(1e-9)
  })

  it('follows Bloch’s law and K_i ∝ Msⁿ from the temperature that the values are given at', () => {
    const spec = job({ anisotropy: { kind: 'interface', interfaceAnisotropy: 1.2e-3 }, magnetizationTemperature: 1000, anisotropyExponent: 2, materialTemperature: 300 })
    const factors = shapeFactors(spec.device)
    const ratio = (1 - 0.4 ** 1.5) / (1 - 0.3 ** 1.5)
    const { saturationMagnetization, diagonal } = materialAt(spec.device, factors, 400)
    expect(relative(saturationMagnetization, 1e6 * ratio)).toBeLessThan(1e-12)
    const expected = 2 * 1.2e-3 * ratio ** 2 / (VACUUM_PERMEABILITY * 1e6 * ratio * 1.5e-9) - 1e6 * ratio * (factors[2] - factors[0])
    expect(relative(diagonal[2], expected)).toBeLessThan(1e-12)
    expect(() => materialAt(spec.device, factors, 1100)).toThrow(PhysicsError)
  })

  it('leaves a stray field beside the applied one', () => {
    const both = prepareProblem(jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, strayField: { z: 5000 } }, environment: { temperature: 300, appliedField: { x: 1000, y: 0, z: 2000 } } }))
    expect(both.dynamics.field[2] * both.numbers.anisotropyField).toBeCloseTo(7000, 8)
    expect(both.dynamics.field[0] * both.numbers.anisotropyField).toBeCloseTo(1000, 8)
  })
})
