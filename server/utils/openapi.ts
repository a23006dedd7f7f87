import { createDocument } from 'zod-openapi'
import type { ZodOpenApiOperationObject, ZodOpenApiPathsObject } from 'zod-openapi'
import { z } from 'zod'
import { idSchema, problemSchema } from '#shared/schemas/api'
import { PROBLEMS } from './problems'
import { ROUTES, routeOf } from './routes'
import type { Route, RouteKey } from './routes'

const problem = problemSchema.meta({ id: 'Problem' })
const idempotencyKey = z.string().min(8).max(80).meta({ description: 'Any 8 to 80 visible characters; the same key with the same body answers with the same job.' })
const ifMatch = z.string().meta({ description: 'The version that the edit starts from, as in its ETag: "4".' })

/** The OpenAPI 3.1 document of every route in the registry. */
export function openApiDocument(settings: { baseUrl: string, version: string }) {
  const paths: ZodOpenApiPathsObject = {}
  for (const key of Object.keys(ROUTES) as RouteKey[]) {
    const [method, path] = key.split(' ') as [string, string]
    const at = path.replace(/:(\w+)/g, '{$1}')
    paths[at] = { ...paths[at], [method.toLowerCase()]: operation(key, routeOf(key)) }
  }
  return createDocument({
    openapi: '3.1.0',
    info: {
      title: 'Farpole', version: settings.version,
      description: 'Numbers are coherent SI unless a name says otherwise. Faults are application/problem+json (RFC 9457).',
    },
    servers: [{ url: settings.baseUrl }],
    components: { securitySchemes: { session: { type: 'apiKey', in: 'cookie', name: 'farpole-session', description: 'Set by signing in.' } } },
    paths,
  })
}

function operation(key: RouteKey, route: Route): ZodOpenApiOperationObject {
  return {
    operationId: operationId(key),
    summary: route.summary,
    ...(route.roles === 'public' ? { security: [] } : { security: [{ session: [] }], description: `For: ${route.roles.join(', ')}.` }),
    requestParams: {
      ...(key.includes('/:id') ? { path: z.object({ id: idSchema }) } : {}),
      ...(route.query instanceof z.ZodObject ? { query: route.query } : {}),
      ...(route.idempotent ? { header: z.object({ 'Idempotency-Key': idempotencyKey }) } : {}),
      ...(route.conditional ? { header: z.object({ 'If-Match': ifMatch }) } : {}),
    },
    ...(route.body ? { requestBody: { required: true, content: { 'application/json': { schema: route.body } } } } : {}),
    responses: { [`${route.status}`]: success(route), default: fault() },
  }
}

function success({ summary, reply }: Route) {
  if (reply === null) return { description: summary }
  if (reply instanceof z.ZodType) return { description: summary, content: { 'application/json': { schema: reply } } }
  return { description: summary, content: { [reply.mediaType]: {} } }
}

const fault = () => ({
  description: `A problem, of type ${Object.keys(PROBLEMS).join(', ')}.`,
  content: { 'application/problem+json': { schema: problem } },
})

/** `GET /api/jobs/:id/paths` → `getJobsIdPaths`. */
function operationId(key: RouteKey): string {
  const [method, path] = key.split(' ') as [string, string]
  return method.toLowerCase() + path.replace(/^\/api/, '').split(/[/:.-]+/).filter(Boolean).map(word => word[0]!.toUpperCase() + word.slice(1)).join('')
}
