import { z } from 'zod'
import { ProblemError } from './problem'

export type FieldErrors<Field extends string> = { [F in Field | 'general']?: string }

/**
 * What a refused form says beside each of its fields, from a ZodError or a ProblemError; `general` when it is about none of them.
 * Anything else is a fault and is thrown on.
 */
export function fieldErrors<Field extends string>(error: unknown, fields: readonly Field[]): FieldErrors<Field> {
  if (!(error instanceof ProblemError || error instanceof z.ZodError)) throw error
  const said = error instanceof ProblemError
    ? (field: string) => error.at(`/${field}`)
    : (field: string) => error.issues.find(({ path }) => path[0] === field)?.message
  const found = fields.map(field => [field, said(field)] as const).filter(([, detail]) => detail !== undefined)
  if (found.length > 0) return Object.fromEntries(found) as FieldErrors<Field>
  if (!(error instanceof ProblemError)) throw error
  const wait = error.retryAfterSeconds === null ? '' : ` Try again in ${Math.ceil(error.retryAfterSeconds)} s.`
  return { general: error.message + wait } as FieldErrors<Field>
}
