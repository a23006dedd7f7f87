import { z } from 'zod'
import {
  caughtMailListSchema, invitationAcceptSchema, invitationCreateSchema, invitationListSchema, invitationLookSchema, invitationSchema,
  invitationSeenSchema, ledgerPageSchema, ledgerQuerySchema, meEditSchema, passwordChangeSchema, personEditSchema, personListSchema, personSchema,
  queueSchema, quotaHistorySchema, resetConfirmSchema, resetRequestSchema, resetRequestedSchema, sessionListSchema,
} from '#shared/schemas/accounts'
import { jobDetailSchema, meSchema, signInSchema } from '#shared/schemas/api'
import type { Role } from '#shared/schemas/api'
import { jobSpecSchema } from '#shared/schemas/job'
import { askersSchema, bulkReplySchema, bulkSchema, jobListQuerySchema, jobListSchema } from '#shared/schemas/jobList'
import {
  jobPinQuerySchema, presetCreateSchema, presetEditSchema, presetListQuerySchema, presetListSchema, presetSchema, presetVersionListSchema,
} from '#shared/schemas/presets'
import { columnsSchema, exportQuerySchema, jobExportSchema } from './exportTables'

/** One route: who may use it, what it takes and what it answers. The guard, the tests and the API document read it. */
export interface Route {
  summary: string
  roles: readonly Role[] | 'public'
  query?: z.ZodType
  body?: z.ZodType
  /** Takes an Idempotency-Key header. */
  idempotent?: true
  /** Takes an If-Match header with the version that is changed. */
  conditional?: true
  status: 200 | 201 | 202 | 204
  /** JSON, another media type, or nothing. */
  reply: z.ZodType | { mediaType: string } | null
}

const EVERYONE = ['researcher', 'student', 'admin'] as const satisfies readonly Role[]
const WRITERS = ['researcher', 'admin'] as const satisfies readonly Role[]
const ADMINS = ['admin'] as const satisfies readonly Role[]

const liveSchema = z.strictObject({ status: z.literal('live'), engineVersion: z.string() })
const readySchema = z.strictObject({
  status: z.literal('ready'), engineVersion: z.string(), database: z.literal('answers'),
  queue: z.enum(['answers', 'away']).meta({ description: 'Redis. While it is away jobs are taken and wait.' }),
  workers: z.int().meta({ description: 'Workers whose heart beats.' }),
})

/** Every route of the API by method and path. */
export const ROUTES = {
  'POST /api/session': { summary: 'Sign in', roles: 'public', body: signInSchema, status: 200, reply: meSchema },
  'DELETE /api/session': { summary: 'Sign out', roles: EVERYONE, status: 204, reply: null },
  'GET /api/me': { summary: 'The signed-in user with team, quota, price of the engine and queue', roles: EVERYONE, status: 200, reply: meSchema },
  'PATCH /api/me': { summary: 'Change the own name and which mails are wanted', roles: EVERYONE, body: meEditSchema, status: 200, reply: meSchema },
  'POST /api/me/password': { summary: 'Change the own password; the other sessions end', roles: EVERYONE, body: passwordChangeSchema, status: 204, reply: null },
  'GET /api/sessions': { summary: 'The own open sessions', roles: EVERYONE, status: 200, reply: sessionListSchema },
  'DELETE /api/sessions/:id': { summary: 'End one of the own sessions', roles: EVERYONE, status: 204, reply: null },
  'POST /api/password-resets': { summary: 'Ask for a link to choose a new password; the reply is the same for every address', roles: 'public', body: resetRequestSchema, status: 202, reply: resetRequestedSchema },
  'POST /api/password-resets/confirm': { summary: 'Choose a new password by such a link; all sessions end', roles: 'public', body: resetConfirmSchema, status: 204, reply: null },
  'GET /api/invitations': { summary: 'Open invitations to the team', roles: ADMINS, status: 200, reply: invitationListSchema },
  'POST /api/invitations': { summary: 'Invite an address to the team in a role, in place of an earlier invitation', roles: ADMINS, body: invitationCreateSchema, status: 201, reply: invitationSchema },
  'DELETE /api/invitations/:id': { summary: 'Take an invitation back', roles: ADMINS, status: 204, reply: null },
  'POST /api/invitations/look': { summary: 'What an invitation offers', roles: 'public', body: invitationLookSchema, status: 200, reply: invitationSeenSchema },
  'POST /api/invitations/accept': { summary: 'Accept an invitation with a name and a password, and sign in', roles: 'public', body: invitationAcceptSchema, status: 200, reply: meSchema },
  'GET /api/ledger': { summary: 'What the own CPU time of the quota’s window went into, newest first, in pages', roles: EVERYONE, query: ledgerQuerySchema, status: 200, reply: ledgerPageSchema },
  'GET /api/queue': { summary: 'Who has what in the queue, and the workers', roles: EVERYONE, status: 200, reply: queueSchema },
  'GET /api/jobs': { summary: 'Jobs of the team, filtered and sorted, in pages', roles: EVERYONE, query: jobListQuerySchema, status: 200, reply: jobListSchema },
  'POST /api/jobs': { summary: 'Queue a job', roles: WRITERS, query: jobPinQuerySchema, body: jobSpecSchema, idempotent: true, status: 201, reply: jobDetailSchema },
  'GET /api/jobs/people': { summary: 'Who of the team has asked jobs', roles: EVERYONE, status: 200, reply: askersSchema },
  'POST /api/jobs/bulk': { summary: 'Cancel, delete or run again up to a hundred jobs, each by the rules of the single command; running again draws a new seed', roles: WRITERS, body: bulkSchema, idempotent: true, status: 200, reply: bulkReplySchema },
  'GET /api/jobs/:id': { summary: 'A job with its specification and its answer, partial while it runs', roles: EVERYONE, status: 200, reply: jobDetailSchema },
  'DELETE /api/jobs/:id': { summary: 'Delete a finished job', roles: WRITERS, status: 204, reply: null },
  'POST /api/jobs/:id/cancel': { summary: 'Cancel a job that waits or runs', roles: WRITERS, status: 200, reply: jobDetailSchema },
  'GET /api/jobs/:id/paths': { summary: 'The paths kept for looking at, as packed arrays', roles: EVERYONE, status: 200, reply: { mediaType: 'application/octet-stream' } },
  'GET /api/jobs/:id/export.json': { summary: 'Specification, answer and provenance as a file', roles: EVERYONE, status: 200, reply: jobExportSchema },
  'GET /api/jobs/:id/export.csv': { summary: 'A table of the answer as CSV', roles: EVERYONE, query: exportQuerySchema, status: 200, reply: { mediaType: 'text/csv' } },
  'GET /api/jobs/:id/export-columns.json': { summary: 'The columns of that table with units', roles: EVERYONE, query: exportQuerySchema, status: 200, reply: columnsSchema },
  'GET /api/events': { summary: 'Changes of the team’s jobs and of the reader’s quota as server-sent events', roles: EVERYONE, status: 200, reply: { mediaType: 'text/event-stream' } },
  'GET /api/presets': { summary: 'Device presets that the team shares and the reader’s own', roles: EVERYONE, query: presetListQuerySchema, status: 200, reply: presetListSchema },
  'POST /api/presets': { summary: 'Save a device preset', roles: WRITERS, body: presetCreateSchema, status: 201, reply: presetSchema },
  'GET /api/presets/:id': { summary: 'A preset at its newest version', roles: EVERYONE, status: 200, reply: presetSchema },
  'PATCH /api/presets/:id': { summary: 'Change a preset: a new version, unless sharing alone changes', roles: WRITERS, conditional: true, body: presetEditSchema, status: 200, reply: presetSchema },
  'GET /api/presets/:id/versions': { summary: 'Versions of a preset, newest first', roles: EVERYONE, status: 200, reply: presetVersionListSchema },
  'POST /api/presets/:id/archive': { summary: 'Take a preset off the lists', roles: WRITERS, status: 200, reply: presetSchema },
  'POST /api/presets/:id/restore': { summary: 'Put an archived preset back on the lists', roles: WRITERS, status: 200, reply: presetSchema },
  'GET /api/people': { summary: 'People of the team with their quotas and what they have in the queue', roles: ADMINS, status: 200, reply: personListSchema },
  'PATCH /api/people/:id': { summary: 'Change a person’s quota, role or state', roles: ADMINS, body: personEditSchema, status: 200, reply: personSchema },
  'GET /api/people/:id/quota-history': { summary: 'Changes of a person’s quota', roles: ADMINS, status: 200, reply: quotaHistorySchema },
  'GET /api/demo-mail': { summary: 'Mails that the demo has caught; not there in other installations', roles: EVERYONE, status: 200, reply: caughtMailListSchema },
  'GET /api/openapi.json': { summary: 'This document', roles: EVERYONE, status: 200, reply: z.looseObject({ openapi: z.string() }) },
  'GET /health': { summary: 'Whether the server can serve people, and with what; 503 with the cause when it cannot', roles: 'public', status: 200, reply: readySchema },
  'GET /health/live': { summary: 'Whether the process lives', roles: 'public', status: 200, reply: liveSchema },
  'GET /health/ready': { summary: 'The same as /health', roles: 'public', status: 200, reply: readySchema },
} as const satisfies Record<string, Route>

export type RouteKey = keyof typeof ROUTES

/** The routes, each seen as nothing more than a route. */
export const routeOf = (key: RouteKey): Route => ROUTES[key]

const PATTERNS = (Object.keys(ROUTES) as RouteKey[]).map((key) => {
  const [method, path] = key.split(' ') as [string, string]
  const pattern = path.split('/').map(part => part.startsWith(':') ? '[^/]+' : part.replace(/\./g, '\\.')).join('/')
  return { method, path, pattern: new RegExp(`^${pattern}$`), open: routeOf(key).roles === 'public' }
})

/** Methods that a path takes; empty for a path that is none of ours. HEAD goes wherever GET does. */
export function methodsOf(path: string): string[] {
  // A path that is written out in the registry is not taken for an id as well.
  const exact = PATTERNS.filter(route => route.path === path)
  const methods = (exact.length > 0 ? exact : PATTERNS.filter(({ pattern }) => pattern.test(path))).map(({ method }) => method)
  return methods.includes('GET') ? ['GET', 'HEAD', ...methods.filter(method => method !== 'GET')] : methods
}

/** Whether a route takes this from people who have not signed in. */
export const isOpen = (method: string, path: string): boolean => PATTERNS.some(route => route.open && route.method === method && route.pattern.test(path))
