import { defineEventHandler, setResponseHeaders } from 'h3'
import { hasSessionCookie } from '../utils/auth'
import { HttpProblem } from '../utils/problems'
import { isOpen, methodsOf } from '../utils/routes'
import { sendProblem } from '../utils/sendProblem'
import { useServices } from '../utils/services'

/** Addresses that answer to programs and not with a page. */
const OURS = /^\/(api|health)(\/|$)/
const SAFE = new Set(['GET', 'HEAD', 'OPTIONS'])

/**
 * Lets through to /api and /health only what the registry knows, so that no route of a module answers there; HEAD is served by the
 * GET route; a write that carries a session, or that needs none, has to come from this site.
 */
export default defineEventHandler((event) => {
  const path = event.path.split('?')[0] ?? ''
  if (!OURS.test(path)) return
  setResponseHeaders(event, { 'Cache-Control': 'no-store', 'X-Content-Type-Options': 'nosniff', 'Referrer-Policy': 'no-referrer' })
  try {
    const methods = methodsOf(path)
    if (methods.length === 0) throw new HttpProblem('not-found')
    if (!methods.includes(event.method)) throw new HttpProblem('method-not-allowed', {}, { Allow: methods.join(', ') })
    if (!SAFE.has(event.method) && (isOpen(event.method, path) || hasSessionCookie(event)) && !isOwnOrigin(event.headers.get('origin'))) {
      throw new HttpProblem('foreign-origin')
    }
    // Node drops the body by the request's own method; the router goes by this one.
    if (event.method === 'HEAD') event._method = 'GET'
  }
  catch (error) {
    return sendProblem(event, error)
  }
})

const isOwnOrigin = (origin: string | null): boolean => origin !== null && origin === new URL(useServices().settings.baseUrl).origin
