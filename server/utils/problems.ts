import { z } from 'zod'
import { PhysicsError } from '#shared/physics/errors'
import type { Problem } from '#shared/schemas/api'
import { databaseErrorNumber } from '../models/transaction'
import { IdempotencyKeyReused, InTheWay, LinkNotValid, NoLongerAdmin, NoSuchPreset, PriceOverCap, QuotaExceeded } from '../models/refusals'

interface Kind { status: number, title: string }

/** Every problem that the API answers with, by its type. */
export const PROBLEMS = {
  'malformed': { status: 400, title: 'The request could not be read.' },
  'idempotency-key-missing': { status: 400, title: 'An Idempotency-Key header of 8 to 80 visible characters is needed.' },
  'unauthenticated': { status: 401, title: 'Sign in first.' },
  'sign-in-refused': { status: 401, title: 'E-mail address and password do not match an account.' },
  'forbidden': { status: 403, title: 'Your role does not allow this.' },
  'foreign-origin': { status: 403, title: 'The request does not come from this site.' },
  'not-found': { status: 404, title: 'There is nothing here for you.' },
  'method-not-allowed': { status: 405, title: 'This address does not take that method.' },
  'conflict': { status: 409, title: 'This cannot be done in the present state.' },
  'quota-exceeded': { status: 409, title: 'The job costs more than what is left of your quota.' },
  'link-not-valid': { status: 410, title: 'This link is not valid any more.' },
  'precondition-failed': { status: 412, title: 'It was changed in the meantime.' },
  'too-large': { status: 413, title: 'The request is too large.' },
  'unsupported-media-type': { status: 415, title: 'The request has to be application/json.' },
  'invalid': { status: 422, title: 'Some values cannot be used.' },
  'price-cap': { status: 422, title: 'The job costs more than any job may.' },
  'idempotency-key-reused': { status: 422, title: 'This Idempotency-Key was used for another job.' },
  'precondition-required': { status: 428, title: 'An If-Match header has to say which version is changed.' },
  'too-many-requests': { status: 429, title: 'Too many attempts.' },
  'internal': { status: 500, title: 'Something went wrong on our side.' },
  'unavailable': { status: 503, title: 'The service is not available just now.' },
} as const satisfies Record<string, Kind>

export type ProblemType = keyof typeof PROBLEMS

type Extra = Partial<Pick<Problem, 'detail' | 'errors' | 'predictedCpuSeconds' | 'leftCpuSeconds' | 'capCpuSeconds' | 'current'>>

/** Thrown by routes and guards; answered as application/problem+json. */
export class HttpProblem extends Error {
  constructor(readonly type: ProblemType, readonly extra: Extra = {}, readonly headers: Record<string, string> = {}) {
    super(PROBLEMS[type].title)
    this.name = 'HttpProblem'
  }
}

/** Seconds after which a client may try again when the database cannot be reached. */
const RETRY_SECONDS = '3'

/** MariaDB errors that pass: too many connections, shutdown, disk or table full, lock wait, killed, deadlock. */
const PASSING_ERRORS = new Set([1021, 1040, 1041, 1053, 1114, 1203, 1205, 1213, 1317, 1927])

/** Turns whatever was thrown into a problem without internals; what is none of ours is `internal`. */
export function toHttpProblem(error: unknown): HttpProblem {
  if (error instanceof HttpProblem) return error
  if (error instanceof z.ZodError) return new HttpProblem('invalid', { errors: zodFaults(error) })
  if (error instanceof PhysicsError) return new HttpProblem('invalid', { errors: [{ pointer: toPointer(error.path), detail: error.message }] })
  if (error instanceof QuotaExceeded) {
    return new HttpProblem('quota-exceeded', { predictedCpuSeconds: error.predictedCpuSeconds, leftCpuSeconds: error.leftCpuSeconds })
  }
  if (error instanceof PriceOverCap) {
    return new HttpProblem('price-cap', { predictedCpuSeconds: error.predictedCpuSeconds, capCpuSeconds: error.capCpuSeconds, detail: `At most ${error.capCpuSeconds} CPU-seconds.` })
  }
  if (error instanceof NoSuchPreset) return new HttpProblem('invalid', { errors: [{ pointer: `/${error.part}`, detail: error.message }] })
  if (error instanceof IdempotencyKeyReused) return new HttpProblem('idempotency-key-reused')
  if (error instanceof InTheWay) return new HttpProblem('conflict', { detail: error.message })
  if (error instanceof NoLongerAdmin) return new HttpProblem('forbidden')
  if (error instanceof LinkNotValid) return new HttpProblem('link-not-valid', { detail: 'It was used, replaced by a newer one or taken back, or it is too old.' })
  if (isDatabaseUnavailable(error)) return new HttpProblem('unavailable', {}, { 'Retry-After': RETRY_SECONDS })
  const status = statusOf(error)
  if (status === 404) return new HttpProblem('not-found')
  if (status === 405) return new HttpProblem('method-not-allowed')
  if (status === 413) return new HttpProblem('too-large')
  if (status !== undefined && status >= 400 && status < 500) return new HttpProblem('malformed')
  return new HttpProblem('internal')
}

/** The body of a problem as RFC 9457 has it. */
export function presentProblem(problem: HttpProblem, request: { path: string, id: string }): Problem {
  const { status, title } = PROBLEMS[problem.type]
  return { type: problem.type, title, status, ...problem.extra, instance: request.path, requestId: request.id }
}

/** JSON pointer (RFC 6901) to a place in a value. */
export const toPointer = (path: readonly PropertyKey[]): string =>
  path.map(part => `/${String(part).replace(/~/g, '~0').replace(/\//g, '~1')}`).join('')

function zodFaults(error: z.ZodError): NonNullable<Problem['errors']> {
  return error.issues.flatMap((issue) => {
    if (issue.code === 'unrecognized_keys') {
      return issue.keys.map(key => ({ pointer: toPointer([...issue.path, key]), detail: 'There is no such value.' }))
    }
    return [{ pointer: toPointer(issue.path), detail: issue.message }]
  }).slice(0, 50)
}

const UNAVAILABLE = /^Sequelize(Connection|Host|AccessDenied|InvalidConnection|Timeout|ConnectionAcquireTimeout)/

/** Whether the database could not be reached or asked to be tried again. */
export function isDatabaseUnavailable(error: unknown): boolean {
  for (let inner = error, depth = 0; depth < 4 && typeof inner === 'object' && inner !== null; depth++) {
    if ('name' in inner && typeof inner.name === 'string' && UNAVAILABLE.test(inner.name)) return true
    if ('sqlState' in inner && typeof inner.sqlState === 'string' && inner.sqlState.startsWith('08')) return true
    if ('fatal' in inner && inner.fatal === true && 'sqlState' in inner) return true
    inner = 'original' in inner ? inner.original : 'cause' in inner ? inner.cause : undefined
  }
  return PASSING_ERRORS.has(databaseErrorNumber(error) ?? 0)
}

const statusOf = (error: unknown): number | undefined =>
  typeof error === 'object' && error !== null && 'statusCode' in error && typeof error.statusCode === 'number' ? error.statusCode : undefined
