import { setResponseHeader, setResponseHeaders, setResponseStatus } from 'h3'
import type { H3Event } from 'h3'
import type { Problem } from '#shared/schemas/api'
import { errorFields, useLog } from './log'
import { PROBLEMS, presentProblem, toHttpProblem } from './problems'

/**
 * Answers with a problem for whatever was thrown; what was not foreseen is logged. A reply that has begun cannot become
 * one: it is cut, so that nobody takes it for whole.
 */
export function sendProblem(event: H3Event, error: unknown): Problem | undefined {
  const problem = toHttpProblem(error)
  const { status } = PROBLEMS[problem.type]
  const requestId = event.context.requestId ?? ''
  if (status >= 500) useLog().error({ requestId, ...event.context.logged, path: event.path.split('?')[0], ...errorFields(error) }, problem.message)
  if (event.node.res.headersSent) {
    event.node.res.destroy()
    return undefined
  }
  setResponseStatus(event, status)
  setResponseHeaders(event, problem.headers)
  setResponseHeader(event, 'Content-Type', 'application/problem+json')
  return presentProblem(problem, { path: event.path.split('?')[0] ?? '', id: requestId })
}

declare module 'h3' {
  interface H3EventContext {
    /** Names the request in replies and in the log. */
    requestId?: string
    /** Ids that the request's line in the log carries beside its own. */
    logged?: { user?: string, job?: string }
  }
}
