import { describe, expect, it } from 'vitest'
import { chunkJob, mergeChunks, openChunk, planJob, priceJob } from '#shared/physics/engine'
import { PhysicsError } from '#shared/physics/errors'
import { deterministicPath } from '#shared/physics/path'
import { canonicalJson, specHash, streamKey } from '#shared/physics/identity'
import { prepareProblem, pulseSegments } from '#shared/physics/problem'
import { writeErrorBias } from '#shared/numerics/stepRule'
import type { JobSpec } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { reducedSpec, WORKED_SET } from '../support/specs'

function run(spec: JobSpec, first: number, count: number): Uint8Array {
  const chunk = openChunk(spec, first, count)
  while (chunk.done < chunk.total) chunk.advance()
  return chunk.finish()
}

describe('results are the same bytes', () => {
  const spec = reducedSpec({ stability: 40, drive: 2, width: 4, trials: 60, damping: 0.2 })

  it('whatever the cut into chunks and the order of arrival', () => {
    const whole = mergeChunks(spec, [run(spec, 0, 60)])
    const cut = mergeChunks(spec, [run(spec, 37, 23), run(spec, 0, 5), run(spec, 5, 32)])
    expect(JSON.stringify(cut.answer)).toBe(JSON.stringify(whole.answer))
    expect(Buffer.from(cut.paths.buffer).equals(Buffer.from(whole.paths.buffer))).toBe(true)
  })

  it('for the trials in common when more are asked for, and other bytes for another seed', () => {
    const more: JobSpec = { ...spec, question: { ...spec.question, kind: 'switching', trials: 5000, failureRule: 'neverCrossed' } }
    expect(streamKey(more)).toEqual(streamKey(spec))
    const reseeded: JobSpec = { ...spec, numerics: { ...spec.numerics, seed: 2 } }
    const [a, b] = [mergeChunks(spec, [run(spec, 0, 60)]), mergeChunks(reseeded, [run(reseeded, 0, 60)])]
    expect(a.answer.kind === 'switching' && b.answer.kind === 'switching' && a.answer.time.mean!.value !== b.answer.time.mean!.value).toBe(true)
  })

  it('and a part of them is said to be partial', () => {
    const { answer } = mergeChunks(spec, [run(spec, 0, 20)])
    expect(answer.complete).toBe(false)
    expect(answer.words.detail).toContain('20 trials so far')
  })
})

describe('the path without noise', () => {
  it('stays on the sphere and crosses under any form of the torque, also where the first trial step is far too long', () => {
    for (const torque of [{ kind: 'asymmetric', polarization: 0.6, asymmetry: 1.6 }, { kind: 'asymmetric', polarization: 0.6, asymmetry: 4 }, { kind: 'symmetric', polarization: 0.95 }] as const) {
      const base = reducedSpec({ stability: 30, drive: 4, width: 4, trials: 10, damping: 0.2 })
      const path = deterministicPath({ ...base, device: { ...base.device, torque } })
      for (let k = 0; k < path.m.length; k += 3) expect(Math.hypot(path.m[k]!, path.m[k + 1]!, path.m[k + 2]!)).toBeCloseTo(1, 5)
      expect(path.endsFar).toBe(true)
    }
  })
})

describe('motion', () => {
  it('returns every path on the grid that it states, starting near and of unit length', () => {
    const spec = jobSpecSchema.parse({ ...WORKED_SET, question: { kind: 'motion', paths: 5, after: 1e-9 }, write: { ...WORKED_SET.write, width: 3e-9, edge: 0.2e-9 } })
    const { answer, paths } = mergeChunks(spec, [run(spec, 0, 2), run(spec, 2, 3)])
    if (answer.kind !== 'motion') throw new TypeError('not a motion answer')
    expect(paths.length).toBe(5 * answer.paths.samples * 3)
    for (let k = 0; k < paths.length; k += 3) expect(Math.hypot(paths[k]!, paths[k + 1]!, paths[k + 2]!)).toBeCloseTo(1, 5)
    for (let p = 0; p < 5; p++) expect(paths[p * answer.paths.samples * 3 + 2]).toBeGreaterThan(0)
    expect(answer.paths.start).toBeCloseTo(-0.1e-9, 15)
    expect(answer.paths.start + answer.paths.interval * (answer.paths.samples - 1)).toBeCloseTo(4.1e-9, 14)
    expect(answer.deterministic.time).toHaveLength(answer.paths.samples)
  })
})

describe('plan and price', () => {
  const spec = reducedSpec({ stability: 40, drive: 2, width: 5, trials: 10_000, damping: 0.01 })

  it('takes the step from the bias that is allowed', () => {
    const loose = planJob(spec)
    const strict = planJob({ ...spec, numerics: { seed: 1, step: { kind: 'automatic', biasAllowed: 0.001 } } })
    expect(loose.stepFrom).toBe('bias')
    expect(writeErrorBias(loose.phaseStep, 0.01, 5, 1)).toBeLessThanOrEqual(0.0100001)
    expect(strict.step).toBeLessThan(loose.step)
    expect(planJob({ ...spec, numerics: { seed: 1, step: { kind: 'fixed', step: 1e-12 } } })).toMatchObject({ step: 1e-12, stepFrom: 'fixed' })
  })

  it('predicts the steps that are done within a fifth', () => {
    const small = { ...spec, question: { ...spec.question, trials: 40 } } as JobSpec
    const { answer } = mergeChunks(small, [run(small, 0, 40)])
    expect(Math.abs(planJob(small).trialSteps / answer.run.trialSteps - 1)).toBeLessThan(0.2)
  })

  it('cuts into chunks of 2 to 5 predicted seconds that cover every trial once', () => {
    const perStep = 4e-7
    const chunks = chunkJob(spec, perStep)
    expect(chunks.length).toBeGreaterThan(1)
    let next = 0
    for (const { firstTrial, trialCount } of chunks) {
      expect(firstTrial).toBe(next)
      next += trialCount
      const seconds = trialCount * planJob(spec).stepsPerTrial * perStep
      expect(seconds).toBeGreaterThan(1.5)
      expect(seconds).toBeLessThan(5)
    }
    expect(next).toBe(10_000)
    expect(priceJob(spec, perStep)).toBeGreaterThan((chunks.length - 1) * 2)
  })

  it('prices the largest job there is at once', () => {
    const started = performance.now()
    const price = priceJob({ ...spec, question: { ...spec.question, trials: 1_000_000 } } as JobSpec, 6e-8)
    expect(price).toBeGreaterThan(100)
    expect(performance.now() - started).toBeLessThan(2000)
  })
})

describe('numbers that describe no device are refused at their field', () => {
  const refused = (input: object): PhysicsError => {
    try {
      planJob(jobSpecSchema.parse({ ...WORKED_SET, ...input }))
    }
    catch (error) {
      if (error instanceof PhysicsError) return error
      throw error
    }
    throw new Error('was accepted')
  }

  it.each([
    ['an easy axis in the film', { device: { ...WORKED_SET.device, anisotropy: { kind: 'interface', interfaceAnisotropy: 1e-4 } } }, ['device', 'anisotropy', 'interfaceAnisotropy']],
    ['a field beyond the switching field', { environment: { temperature: 300, appliedField: { x: 0, y: 0, z: -3e5 } } }, ['environment', 'appliedField']],
    ['a transverse field that leaves one state', { environment: { temperature: 300, appliedField: { x: 3e5, y: 0, z: 0 } } }, ['environment', 'appliedField']],
    ['a step that turns the moment too far', { numerics: { seed: 1, step: { kind: 'fixed', step: 5e-11 } } }, ['numerics', 'step', 'step']],
    ['too many steps', { write: { ...WORKED_SET.write, width: 1e-5 } }, ['write', 'width']],
  ])('%s', (_name, input, path) => {
    expect(refused(input).path).toEqual(path)
  })
})

describe('identity', () => {
  it('is independent of the order of keys and changes with every number', () => {
    expect(canonicalJson({ b: [1, { d: -0, c: 2 }], a: 'x' })).toBe('{"a":"x","b":[1,{"c":2,"d":0}]}')
    const spec = jobSpecSchema.parse(WORKED_SET)
    const changed = jobSpecSchema.parse({ ...WORKED_SET, environment: { temperature: 301 } })
    expect(specHash(spec)).toMatch(/^[0-9a-f]{64}$/)
    expect(specHash(changed)).not.toBe(specHash(spec))
    expect(streamKey(changed)).not.toEqual(streamKey(spec))
    const renamed = jobSpecSchema.parse({ ...WORKED_SET, device: { ...WORKED_SET.device, label: 'another name' } })
    expect(streamKey(renamed)).toEqual(streamKey(spec))
  })
})

describe('the pulse', () => {
  it('is as wide as stated between half amplitudes', () => {
    const area = pulseSegments(5e-9, 1e-9, 1e-12).reduce((sum, s) => sum + (s.end - s.start) * (s.from + s.to) / 2, 0)
    expect(area).toBeCloseTo(5e-9, 20)
    expect(pulseSegments(5e-9, 0, 1e-12)).toHaveLength(1)
    expect(pulseSegments(2e-9, 2e-9, 1e-12)).toHaveLength(2)
  })

  it('is cut into steps no longer than allowed', () => {
    const problem = prepareProblem(jobSpecSchema.parse({ ...WORKED_SET, write: { ...WORKED_SET.write, edge: 0.7e-9 } }))
    for (const s of problem.pulse) expect((s.end - s.start) / s.steps / problem.rate).toBeLessThanOrEqual(problem.step * (1 + 1e-9))
  })
})
