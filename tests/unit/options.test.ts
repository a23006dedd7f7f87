import { describe, expect, it } from 'vitest'
import { chunkJob, mergeChunks, openChunk, planJob } from '#shared/physics/engine'
import { deriveNumbers } from '#shared/physics/derived'
import { PhysicsError, RunFailure } from '#shared/physics/errors'
import { prepareProblem } from '#shared/physics/problem'
import { drivenTime, waveformPieces } from '#shared/physics/waveform'
import { collinearProblem } from '#shared/physics/writeError'
import { answerSchema } from '#shared/schemas/answer'
import type { JobSpec, JobSpecInput } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { WORKED_SET } from '../support/specs'

const device = { ...WORKED_SET.device, damping: 0.05 }
const write = { ...WORKED_SET.write, drive: { kind: 'voltage', voltage: 1.1 }, width: 3e-9, edge: 0.3e-9 } as const
const job = (changes: { device?: object, write?: object, start?: object, environment?: object, question?: object }): JobSpec => jobSpecSchema.parse({
  question: changes.question ?? { kind: 'switching', trials: 24 }, device: { ...device, ...changes.device }, environment: { temperature: 300, ...changes.environment },
  write: { ...write, ...changes.write }, ...(changes.start ? { start: changes.start } : {}), numerics: { seed: 5 },
} as JobSpecInput)

function run(spec: JobSpec, first: number, count: number): Uint8Array {
  const chunk = openChunk(spec, first, count)
  while (chunk.done < chunk.total) chunk.advance()
  return chunk.finish()
}

function motionOf(spec: JobSpec, count: number) {
  const { answer, paths } = mergeChunks(spec, [run(spec, 0, count)])
  if (answer.kind !== 'motion') throw new TypeError('not a motion answer')
  return { answer, paths }
}

const laws = { materialTemperature: 300, magnetizationTemperature: 1200, anisotropyExponent: 2.2, tmrSlope: 1e-3, thermalResistance: 2e5 }
const inPlane = { anisotropy: { kind: 'inPlane', interfaceAnisotropy: 0.2e-3 }, diameter: 100e-9, secondDiameter: 40e-9, thickness: 2e-9 }

describe('every option, from the specification to the answer', () => {
  it.each<[string, Parameters<typeof job>[0]]>([
    ['an ellipse with an in-plane uniaxial field', { device: { secondDiameter: 30e-9, uniaxialField: 6000, shape: 'ellipsoid' } }],
    ['an easy axis in the film', { device: inPlane, write: { drive: { kind: 'current', current: 2e-3 } } }],
    ['an easy axis in the film, from antiparallel in a field', { device: { ...inPlane, strayField: { x: 500, y: 300 }, referenceTilt: 0.05 }, write: { direction: 'antiparallelToParallel', drive: { kind: 'current', current: 2e-3 } } }],
    ['voltage-controlled anisotropy and a quadratic field-like torque', { device: { voltageAnisotropy: 50e-15, barrierThickness: 1e-9, fieldLikeQuadratic: 3e4, halfVoltage: 0.5 } }],
    ['laws and heating', { device: laws }],
    ['an access transistor', { write: { drive: { kind: 'voltage', voltage: 2 }, seriesResistance: 500, currentLimit: 2.6e-4 } }],
    ['a train', { write: { drive: { kind: 'voltage', voltage: 2 }, width: 1.5e-9, waveform: { kind: 'train', pulses: 4, period: 2e-9 } } }],
    ['a bipolar pair', { write: { waveform: { kind: 'bipolar', reverseRatio: 0.5, reverseWidth: 1e-9, gap: 0.2e-9 } } }],
    ['points', { write: { drive: { kind: 'voltage', voltage: 2 }, width: 3e-9, edge: 0, waveform: { kind: 'points', time: [0, 1e-9, 3e-9, 4e-9], amplitude: [0, 1, 1, 0] } } }],
    ['a fixed angle', { start: { kind: 'fixedAngle', angle: 0.3, azimuth: 1 } }],
    ['a thermalised start', { start: { kind: 'thermalised', duration: 1e-9 } }],
  ])('%s: the same bytes for any cut, a schema that holds, and steps as planned', (_name, changes) => {
    const spec = job(changes)
    const whole = mergeChunks(spec, [run(spec, 0, 24)])
    const cut = mergeChunks(spec, [run(spec, 13, 11), run(spec, 0, 13)])
    expect(JSON.stringify(cut.answer)).toBe(JSON.stringify(whole.answer))
    const sent: unknown = JSON.parse(JSON.stringify(whole.answer))
    expect(answerSchema.parse(sent)).toEqual(sent)
    expect(JSON.stringify(whole.answer)).not.toContain('null,null,null')
    // The axial equation has none of these parts.
    expect(collinearProblem(spec)).toBeTypeOf('string')
    const { answer } = whole
    if (answer.kind !== 'switching') throw new TypeError('not a switching answer')
    expect(answer.time.crossed).toBeGreaterThan(12)
    expect(answer.deterministic.crossing).not.toBeNull()
    expect(deriveNumbers(spec).numbers.every(number => Number.isFinite(number.value))).toBe(true)
    expect(chunkJob(spec, 1e-7).reduce((sum, chunk) => sum + chunk.trialCount, 0)).toBe(24)
    expect(planJob(spec).trialSteps / answer.run.trialSteps).toBeGreaterThan(0.6)
    expect(planJob(spec).trialSteps / answer.run.trialSteps).toBeLessThan(1.6)
  })

  it('paths of an in-plane cell start along x, in the axes of the film', () => {
    const spec = job({ device: inPlane, write: { drive: { kind: 'current', current: 2e-3 } }, question: { kind: 'motion', paths: 3 } })
    const { answer, paths } = motionOf(spec, 3)
    for (let p = 0; p < 3; p++) expect(paths[p * answer.paths.samples * 3]).toBeGreaterThan(0.8)
    expect(answer.deterministic.m[0]).toBeGreaterThan(0.9)
    expect(Math.abs(answer.deterministic.m[2]!)).toBeLessThan(0.1)
  })
})

describe('a run that cannot be', () => {
  it('is refused where heat turns the moment about within a step', () => {
    const spec = job({ device: { damping: 1, diameter: 2e-9, thickness: 2e-10 }, write: { drive: { kind: 'current', current: 1e-6 } } })
    expect(() => prepareProblem(spec)).toThrow(/Heat turns the moment by .* rad in one step/)
  })

  it('ends as a failure that names trial and region, never as a number', () => {
    const spec = job({})
    const chunk = openChunk({ ...spec, start: { kind: 'fixedAngle', angle: NaN, azimuth: 0 } }, 8, 4)
    expect(() => chunk.advance()).toThrow(RunFailure)
    expect(() => chunk.advance()).toThrow(/Trial 8 left the sphere .* at α = 0.05, Δ = [\d.]+, i = [\d.]+, T = 300.0 K, Δt = [\d.]+ ps/)
  })
})

describe('waveforms', () => {
  const write = job({}).write
  it('follow one another without gaps', () => {
    for (const waveform of [{ kind: 'train', pulses: 4, period: 5e-9 }, { kind: 'bipolar', reverseRatio: 0.5, reverseWidth: 2e-9, gap: 1e-9 }] as const) {
      const pieces = waveformPieces({ ...write, waveform })
      for (let k = 1; k < pieces.length; k++) {
        expect(pieces[k]!.start).toBeCloseTo(pieces[k - 1]!.end, 18)
        expect(pieces[k]!.from).toBe(pieces[k - 1]!.to)
      }
    }
    expect(drivenTime({ ...write, waveform: { kind: 'train', pulses: 4, period: 5e-9 } })).toBeCloseTo(4 * write.width, 18)
    expect(drivenTime({ ...write, waveform: { kind: 'bipolar', reverseRatio: 0.5, reverseWidth: 2e-9, gap: 1e-9 } })).toBeCloseTo(write.width + 1e-9, 18)
  })

  it('from points are the trapezoid when they say so', () => {
    const points = job({ write: { width: 3e-9, edge: 0, waveform: { kind: 'points', time: [1e-9, 1.3e-9, 4e-9, 4.3e-9], amplitude: [0, 1, 1, 0] } } })
    const [a, b] = [waveformPieces(points.write), waveformPieces(job({}).write)]
    for (const [k, piece] of a.entries()) {
      expect(piece.start).toBeCloseTo(b[k]!.start, 18)
      expect(piece.to).toBe(b[k]!.to)
    }
    expect(() => prepareProblem(job({ write: { width: 2e-9, waveform: points.write.waveform } }))).toThrow('3.000000 ns')
    expect(() => prepareProblem(job({ write: { waveform: { kind: 'train', pulses: 3, period: 1e-9 } } }))).toThrow(PhysicsError)
  })

  it('a train of two is a pulse and the same again, on the same noise', () => {
    const one = job({ write: { width: 1e-9 } })
    const pieces = waveformPieces({ ...one.write, waveform: { kind: 'train', pulses: 2, period: 3e-9 } })
    expect(pieces).toHaveLength(7)
    expect(pieces[4]!.start - pieces[0]!.start).toBeCloseTo(3e-9, 18)
  })
})

describe('starts', () => {
  it('at a fixed angle are there', () => {
    const spec = job({ start: { kind: 'fixedAngle', angle: 0.4, azimuth: 0.5 }, question: { kind: 'motion', paths: 2 } })
    const { paths, answer } = motionOf(spec, 2)
    for (const p of [0, 1]) expect([...paths.slice(p * answer.paths.samples * 3, p * answer.paths.samples * 3 + 3)].map(c => Number(c.toFixed(6)))).toEqual([Math.sin(0.4) * Math.cos(0.5), Math.sin(0.4) * Math.sin(0.5), Math.cos(0.4)].map(c => Number(c.toFixed(6))))
    expect(answer.deterministic.startAngle).toBe(0.4)
  })

  it('thermalised have the spread of the well: ⟨1 − z²⟩ ≈ 1/Δ', () => {
    const spec = job({ device: { damping: 0.3 }, start: { kind: 'thermalised', duration: 1e-9 }, write: { width: 1e-11, edge: 0 } })
    const many = { ...spec, question: { kind: 'motion', paths: 64, after: 0 } } as JobSpec
    const { paths, answer } = motionOf(many, 64)
    let sum = 0
    for (let p = 0; p < 64; p++) sum += 1 - paths[p * answer.paths.samples * 3 + 2]! ** 2
    const expected = 1 / prepareProblem(many).numbers.stability
    // 1 − z² is exponential: 64 of them know their mean to an eighth.
    expect(Math.abs(sum / 64 / expected - 1)).toBeLessThan(0.5)
  })
})
