import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { z } from 'zod'
import { meSchema } from '#shared/schemas/api'
import { presetListSchema } from '#shared/schemas/presets'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { ROUTES, routeOf } from '../../server/utils/routes'
import type { RouteKey } from '../../server/utils/routes'
import type { Client } from './harness'
import { finished, openTestDatabase, signIn, submit, switchingSpec, waitFor } from './harness'

type Json = Record<string, unknown>

let db: Database
let client: Client
let document: Json
/** Something to read below each path that takes an id. */
let ids: Record<string, string>

beforeAll(async () => {
  db = openTestDatabase()
  client = await signIn('admin')
  document = await (await client.get('/api/openapi.json')).json() as Json
  const { user } = meSchema.parse(await (await client.get('/api/me')).json())
  const { presets: [preset] } = presetListSchema.parse(await (await client.get('/api/presets')).json())
  const { id: jobId } = await submit(client, switchingSpec({ trials: 60 }))
  ids = { jobs: jobId, people: user.id, presets: preset!.id }
  await finished(client, jobId)
})
afterAll(() => closeDatabase(db))

const at = (value: unknown, ...path: string[]): unknown => path.reduce<unknown>((inner, part) => (inner as Json | undefined)?.[part], value)

/** What the served document, and nothing else, says of a reply, as a validator. */
function replySchema(key: RouteKey, status: number | 'default', media: string): z.ZodType | undefined {
  const [method, path] = key.split(' ') as [string, string]
  const schema = at(document, 'paths', path.replace(':id', '{id}'), method.toLowerCase(), 'responses', String(status), 'content', media, 'schema')
  if (schema === undefined) return undefined
  const local = JSON.parse(JSON.stringify({ ...schema as Json, $defs: at(document, 'components', 'schemas') }).replaceAll('#/components/schemas/', '#/$defs/')) as Parameters<typeof z.fromJSONSchema>[0]
  return z.fromJSONSchema(local)
}

const reads = (Object.keys(ROUTES) as RouteKey[]).filter(key => key.startsWith('GET ') && key !== 'GET /api/events')

describe('the API document', () => {
  it('is OpenAPI 3.1 and names every route', () => {
    expect(document.openapi).toBe('3.1.0')
    const paths = new Set(Object.keys(ROUTES).map(key => key.split(' ')[1]!.replace(':id', '{id}')))
    expect(new Set(Object.keys(document.paths as Json))).toEqual(paths)
  })

  it.each(reads)('describes the reply of %s', async (key) => {
    const query = key.includes('/export') && routeOf(key).query ? '?table=summary' : ''
    const reply = await client.get(key.split(' ')[1]!.replace(':id', ids[key.split('/')[2]!] ?? '') + query)
    expect(reply.status).toBe(routeOf(key).status)
    const media = reply.headers.get('content-type')!.split(';')[0]!
    const responses = at(document, 'paths', key.split(' ')[1]!.replace(':id', '{id}'), 'get', 'responses', '200', 'content') as Json
    expect(Object.keys(responses)).toEqual([media])
    if (media !== 'application/json') return
    expect(replySchema(key, 200, media)!.safeParse(await reply.json()).error).toBeUndefined()
  })

  it('describes what creating, changing and refusing answers', async () => {
    const created = await client.post('/api/jobs', switchingSpec({ trials: 20 }), { 'Idempotency-Key': 'openapi-created' })
    expect(replySchema('POST /api/jobs', 201, 'application/json')!.safeParse(await created.json()).error).toBeUndefined()
    const refused = await client.post('/api/jobs', {}, { 'Idempotency-Key': 'openapi-refused' })
    expect(refused.headers.get('content-type')).toContain('application/problem+json')
    const problem = await refused.json() as Json
    expect(replySchema('POST /api/jobs', 'default', 'application/problem+json')!.safeParse(problem).error).toBeUndefined()
    expect(problem).toMatchObject({ status: 422, type: 'invalid', instance: '/api/jobs', requestId: refused.headers.get('x-request-id') })
  })

  it('has a schema that a wrong reply fails', () => {
    expect(replySchema('GET /api/me', 200, 'application/json')!.safeParse({ user: {} }).success).toBe(false)
  })
})

describe('server-sent events', () => {
  it('tell of each change with an id, and give those missed to a reader that comes back', async () => {
    const open = async (after?: string) => {
      const stop = new AbortController()
      const reply = await fetch(`${client.baseUrl}/api/events`, { signal: stop.signal, headers: { Cookie: client.cookie, ...(after ? { 'Last-Event-ID': after } : {}) } })
      let text = ''
      const reading = (async () => {
        const reader = reply.body!.pipeThrough(new TextDecoderStream()).getReader()
        for (let part = await reader.read(); !part.done; part = await reader.read()) text += part.value
      })().catch(() => undefined)
      return { text: () => text, close: async () => { stop.abort(); await reading } }
    }
    const first = await open()
    await waitFor('the stream to begin', () => first.text().includes('retry:'))
    const { id } = await submit(client, switchingSpec({ trials: 20, seed: 77 }))
    await waitFor('the new job', () => first.text().includes(`"id":"${id}"`))
    const lastId = /id: (\d+)\nevent: job\ndata: .*\n/.exec(first.text())![1]!
    await first.close()
    await finished(client, id)
    const second = await open(lastId)
    await waitFor('what was missed', () => second.text().includes('"state":"done"'))
    const ids = [...second.text().matchAll(/^id: (\d+)$/gm)].map(match => Number(match[1]))
    expect(Math.min(...ids)).toBeGreaterThan(Number(lastId))
    expect(new Set(ids).size).toBe(ids.length)
    expect(second.text()).not.toContain('"own"')
    await second.close()
  })
})
