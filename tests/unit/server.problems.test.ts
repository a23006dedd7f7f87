import { describe, expect, it } from 'vitest'
import { z } from 'zod'
import { PhysicsError } from '#shared/physics/errors'
import { problemSchema } from '#shared/schemas/api'
import { IdempotencyKeyReused, PriceOverCap, QuotaExceeded } from '../../server/models/refusals'
import { HttpProblem, PROBLEMS, presentProblem, toHttpProblem, toPointer } from '../../server/utils/problems'

const shown = (error: unknown) => {
  const problem = toHttpProblem(error)
  return { ...presentProblem(problem, { path: '/api/jobs', id: 'r1' }), headers: problem.headers }
}
const zodError = (schema: z.ZodType, value: unknown) => schema.safeParse(value).error

describe('the mapper from errors to problems', () => {
  it('answers every type in the published shape', () => {
    for (const type of Object.keys(PROBLEMS) as (keyof typeof PROBLEMS)[]) {
      const problem = presentProblem(new HttpProblem(type), { path: '/api/jobs', id: 'r1' })
      expect(problemSchema.safeParse(problem).success, type).toBe(true)
    }
  })

  it('points at each faulty field and at each unknown key', () => {
    const schema = z.strictObject({ device: z.strictObject({ 'a/b': z.number() }), seed: z.int() })
    const { status, errors } = shown(zodError(schema, { device: { 'a/b': 'x', 'role': 1 }, seed: 1.5, ownerId: 'me' }))
    expect(status).toBe(422)
    expect(errors?.map(error => error.pointer).sort()).toEqual(['/device/a~1b', '/device/role', '/ownerId', '/seed'])
  })

  it('treats a device that is none like a faulty field', () => {
    expect(shown(new PhysicsError(['device', 'anisotropy'], 'The easy axis lies in the plane.')))
      .toMatchObject({ status: 422, errors: [{ pointer: '/device/anisotropy', detail: 'The easy axis lies in the plane.' }] })
  })

  it('says price and rest when the quota or the cap refuses', () => {
    expect(shown(new QuotaExceeded(12.5, 3))).toMatchObject({ status: 409, type: 'quota-exceeded', predictedCpuSeconds: 12.5, leftCpuSeconds: 3 })
    expect(shown(new PriceOverCap(1e9, 36_000))).toMatchObject({ status: 422, type: 'price-cap', predictedCpuSeconds: 1e9, capCpuSeconds: 36_000 })
    expect(shown(new IdempotencyKeyReused())).toMatchObject({ status: 422, type: 'idempotency-key-reused' })
  })

  it.each([
    ['refused connection', Object.assign(new Error('x'), { name: 'SequelizeConnectionRefusedError' })],
    ['no free connection', Object.assign(new Error('x'), { name: 'SequelizeConnectionAcquireTimeoutError' })],
    ['connection lost in a query', Object.assign(new Error('x'), { name: 'SequelizeDatabaseError', original: { fatal: true, sqlState: '08S01', errno: 45009 } })],
    ['server shutting down', Object.assign(new Error('x'), { name: 'SequelizeDatabaseError', original: { errno: 1053 } })],
    ['deadlock that outlived the retries', Object.assign(new Error('x'), { name: 'SequelizeDatabaseError', original: { errno: 1213 } })],
  ])('answers 503 with Retry-After for a database that is away: %s', (_, error) => {
    expect(shown(error)).toMatchObject({ status: 503, headers: { 'Retry-After': '3' } })
  })

  it('says nothing of what went wrong inside', () => {
    const error = Object.assign(new Error('SELECT passwordHash FROM users'), { name: 'SequelizeDatabaseError', original: { errno: 1054 } })
    const text = JSON.stringify(shown(error))
    expect(text).toContain('"status":500')
    expect(text).not.toMatch(/SELECT|passwordHash|Sequelize|stack/)
    expect(JSON.stringify(shown('plain text'))).toContain('"status":500')
  })

  it('writes pointers after RFC 6901', () => {
    expect(toPointer(['a', 0, 'b~c/d'])).toBe('/a/0/b~0c~1d')
    expect(toPointer([])).toBe('')
  })
})
