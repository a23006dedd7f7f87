import { problemSchema, type Problem } from '#shared/schemas/api'

/** A refused or failed request in the shape of RFC 9457. Status 0: the server was not reached. */
export class ProblemError extends Error {
  constructor(readonly problem: Problem, readonly retryAfterSeconds: number | null = null) {
    super(problem.detail ?? problem.title)
    this.name = 'ProblemError'
  }

  get status(): number {
    return this.problem.status
  }

  /** What is said of the field at a JSON pointer ("/email"), if anything. */
  at(pointer: string): string | undefined {
    return this.problem.errors?.find(error => error.pointer === pointer)?.detail
  }
}

const WORDS: Record<number, string> = {
  0: 'The server could not be reached. Nothing was changed; try again when the connection is back.',
  401: 'You are signed out. Sign in to go on.',
  403: 'Your role does not allow this.',
  404: 'There is nothing here that you can see.',
  409: 'This was changed meanwhile. Reload the page and look again.',
  429: 'Too many requests. Wait a little and try again.',
  503: 'The service is not available for the moment. Nothing was changed; try again shortly.',
}

/** The problem a failed fetch carries, or one made of its status. Anything that is no fetch error is returned as it came. */
export function toProblemError(error: unknown): unknown {
  if (error instanceof ProblemError || !isFetchError(error)) return error
  const status = error.response?.status ?? 0
  const parsed = problemSchema.safeParse(error.data)
  const problem: Problem = parsed.success
    ? parsed.data
    : { type: 'about:blank', title: status === 0 ? 'No connection' : 'The request failed', status, detail: WORDS[status] ?? 'The request failed and the server gave no reason.' }
  const retryAfter = Number(error.response?.headers.get('retry-after') ?? Number.NaN)
  return new ProblemError(problem, Number.isFinite(retryAfter) ? retryAfter : null)
}

interface FetchErrorLike extends Error { response?: Response, data?: unknown }
const isFetchError = (error: unknown): error is FetchErrorLike => error instanceof Error && error.name === 'FetchError'
