import { createHash } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { openChunk, planJob } from '#shared/physics/engine'
import type { JobSpecInput } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { unpackArrays } from '#shared/utils/arrays'
import { WORKED_SET } from '../support/specs'

/** Digest of what the trials of a job did. */
function digestOf(input: JobSpecInput): string {
  const spec = jobSpecSchema.parse(input)
  const { trials } = planJob(spec)
  const chunk = openChunk(spec, 0, trials)
  while (chunk.done < chunk.total) chunk.advance()
  const part = chunk.finish()
  const { arrays } = unpackArrays(part)
  const hash = createHash('sha256')
  for (const name of ['times', 'flags', 'paths']) hash.update(new Uint8Array(arrays[name]!.buffer))
  return hash.digest('hex').slice(0, 16)
}

const write = { ...WORKED_SET.write, width: 4e-9, edge: 0.4e-9 }
const device = { ...WORKED_SET.device, damping: 0.03 }
const question = { kind: 'switching', trials: 30 } as const

describe('a specification keeps its bytes from one release to the next', () => {
  it.each<[string, JobSpecInput, string]>([
    ['effective field, constant torque', { ...WORKED_SET, question, device, write }, '9a33bd572eeaecb5'],
    ['interface, symmetric junction, field-like torque, a field', {
      ...WORKED_SET, question, write,
      device: { ...device, anisotropy: { kind: 'interface', interfaceAnisotropy: 1.15e-3 }, torque: { kind: 'symmetric', polarization: 0.6 }, fieldLikeRatio: 0.2 },
      environment: { temperature: 350, appliedField: { x: 8000, y: -3000, z: 5000 } },
    }, '180a8e6ab1ee41db'],
    ['tilted reference under a voltage, from antiparallel', {
      ...WORKED_SET, question, device: { ...device, referenceTilt: 0.1 },
      write: { ...write, direction: 'antiparallelToParallel', drive: { kind: 'voltage', voltage: 0.5 } },
    }, 'd9d478f8928ee3eb'],
    ['motion', { ...WORKED_SET, question: { kind: 'motion', paths: 5, after: 1e-9 }, device, write }, '0c6c0f9d4d535d82'],
  ])('%s', (_name, input, digest) => {
    expect(digestOf(input)).toBe(digest)
  })
})
