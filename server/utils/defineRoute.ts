import { defineEventHandler, getRequestHeader, getRouterParam, setResponseStatus } from 'h3'
import type { H3Event } from 'h3'
import { z } from 'zod'
import { idSchema } from '#shared/schemas/api'
import { authenticate } from './auth'
import type { Auth } from './auth'
import { HttpProblem } from './problems'
import { readIdempotencyKey, readIfMatch, readJsonBody, readQuery } from './requests'
import { sendProblem } from './sendProblem'
import { routeOf } from './routes'
import type { RouteKey, ROUTES } from './routes'

type RouteAt<K extends RouteKey> = typeof ROUTES[K]
type Parsed<R, Part extends 'body' | 'query'> = R extends Record<Part, infer S extends z.ZodType> ? z.output<S> : undefined
type Id<K extends RouteKey> = K extends `${string}/:id${string}` ? string : undefined
type AuthOf<R> = R extends { roles: 'public' } ? undefined : Auth
/** What a handler of a route gives back: the reply's shape, or bytes or a stream where the reply is no JSON. */
type Reply<R> = R extends { reply: infer S } ? S extends z.ZodType ? z.input<S> : S extends null ? null : unknown : never

export interface RouteContext<K extends RouteKey> {
  event: H3Event
  auth: AuthOf<RouteAt<K>>
  body: Parsed<RouteAt<K>, 'body'>
  query: Parsed<RouteAt<K>, 'query'>
  id: Id<K>
  idempotencyKey: RouteAt<K> extends { idempotent: true } ? string : undefined
  /** Version that the edit starts from. */
  ifMatch: RouteAt<K> extends { conditional: true } ? number : undefined
}

const nothing = z.strictObject({})

/**
 * A route of the registry: authorises, parses strictly, lets `act` do its work and answers with the route's status.
 * Whatever is thrown becomes a problem.
 */
export function defineRoute<K extends RouteKey>(key: K, act: (context: RouteContext<K>) => Promise<Reply<RouteAt<K>>> | Reply<RouteAt<K>>) {
  const route = routeOf(key)
  const hasId = key.includes('/:id')
  const writes = !key.startsWith('GET ')
  return defineEventHandler(async (event) => {
    try {
      const auth = route.roles === 'public' ? undefined : await authorise(event, route.roles)
      const id = hasId ? readId(event) : undefined
      event.context.logged = { ...(auth ? { user: auth.user.id } : {}), ...(id && key.includes('/jobs/') ? { job: id } : {}) }
      const query = (route.query ?? nothing).parse(readQuery(event.node.req.url ?? ''))
      const body = writes ? parseBody(route.body, await readJsonBody(event.node.req)) : undefined
      const idempotencyKey = route.idempotent ? readIdempotencyKey(getRequestHeader(event, 'idempotency-key')) : undefined
      const ifMatch = route.conditional ? readIfMatch(getRequestHeader(event, 'if-match')) : undefined
      // The registry's entry is what types the context; this is the one place that joins the two.
      const reply = await act({ event, auth, id, query, body, idempotencyKey, ifMatch } as RouteContext<K>)
      if (event.handled) return
      setResponseStatus(event, route.status)
      return reply
    }
    catch (error) {
      return sendProblem(event, error)
    }
  })
}

async function authorise(event: H3Event, roles: readonly string[]): Promise<Auth> {
  const auth = await authenticate(event)
  if (!auth) throw new HttpProblem('unauthenticated')
  if (!roles.includes(auth.user.role)) throw new HttpProblem('forbidden')
  return auth
}

function readId(event: H3Event): string {
  const id = idSchema.safeParse(getRouterParam(event, 'id'))
  if (!id.success) throw new HttpProblem('not-found')
  return id.data
}

function parseBody(schema: z.ZodType | undefined, value: unknown): unknown {
  if (schema) {
    if (value === undefined) throw new HttpProblem('malformed', { detail: 'A JSON body is needed.' })
    return schema.parse(value)
  }
  nothing.optional().parse(value)
  return undefined
}
