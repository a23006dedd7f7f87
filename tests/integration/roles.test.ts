import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { ROLES } from '#shared/schemas/api'
import type { Role } from '#shared/schemas/api'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { newId } from '../../server/models/id'
import { ROUTES, methodsOf, routeOf } from '../../server/utils/routes'
import type { RouteKey } from '../../server/utils/routes'
import { addUser, addressOf } from '../support/people'
import { Client, openTestDatabase, signIn, submit, switchingSpec, theStack } from './harness'

let db: Database
const clients = new Map<Role, Client>()
const keys = Object.keys(ROUTES) as RouteKey[]

beforeAll(async () => {
  db = openTestDatabase()
  for (const role of ROLES) clients.set(role, await signIn(role))
})
afterAll(() => closeDatabase(db))

/** Calls a route with an id that nobody has and a body that nothing accepts, so that a caller who gets in changes nothing. */
async function call(client: Client, key: RouteKey): Promise<number> {
  const [method, path] = key.split(' ') as [string, string]
  const stop = new AbortController()
  const reply = await fetch(client.baseUrl + path.replace(':id', newId()), {
    method,
    signal: stop.signal,
    headers: { 'Origin': client.baseUrl, 'Cookie': client.cookie, ...(method === 'GET' ? {} : { 'Content-Type': 'application/json' }) },
    ...(method === 'GET' ? {} : { body: '{"none":1}' }),
  })
  stop.abort()
  return reply.status
}

describe.each(keys)('%s', (key) => {
  const { roles } = routeOf(key)

  it('asks strangers to sign in, unless it is open to all', async () => {
    const reply = await call(new Client(theStack().baseUrl), key)
    if (roles === 'public') expect(reply).not.toBe(401)
    else expect(reply).toBe(401)
  })

  it.each(ROLES)('answers a %s as the registry says', async (role) => {
    const reply = await call(clients.get(role)!, key)
    if (roles === 'public' || roles.includes(role)) expect([401, 403, 500, 503]).not.toContain(reply)
    else expect(reply).toBe(403)
  })
})

describe('methods', () => {
  const paths = [...new Set(keys.map(key => key.split(' ')[1]!))]

  it.each(paths)('%s names those it takes to whoever uses another', async (path) => {
    const at = path.replace(':id', newId())
    const allowed = methodsOf(at)
    for (const method of ['PUT', 'DELETE', 'POST', 'PATCH', 'GET'].filter(name => !allowed.includes(name))) {
      const reply = await clients.get('admin')!.send(method, at, undefined, {})
      expect(reply.status, method).toBe(405)
      expect(reply.headers.get('allow'), method).toBe(allowed.join(', '))
      expect(reply.headers.get('content-type')).toContain('application/problem+json')
    }
  })

  it('answer HEAD as GET without a body', async () => {
    const client = clients.get('student')!
    const reply = await client.send('HEAD', '/api/me', undefined, {})
    expect(reply.status).toBe(200)
    expect(reply.headers.get('content-type')).toContain('application/json')
    expect(await reply.text()).toBe('')
    expect((await client.send('HEAD', '/api/events', undefined, {})).status).toBe(200)
    expect((await new Client(client.baseUrl).send('HEAD', '/api/me', undefined, {})).status).toBe(401)
  })

  it('of an unknown address are none: 404', async () => {
    for (const path of ['/api', '/api/', '/api/users', '/api/jobs/x', `/api/jobs/${newId()}/secret`]) {
      expect((await clients.get('admin')!.get(path)).status, path).toBe(404)
    }
  })
})

describe('a job', () => {
  it('of another team is not there, on any of its addresses', async () => {
    const foreign = await signIn(addressOf(await addUser(db)))
    const { id } = await submit(foreign, switchingSpec({ trials: 20 }))
    for (const role of ROLES) {
      for (const key of keys.filter(candidate => candidate.includes('/api/jobs/:id') && routeOf(candidate).roles.includes(role))) {
        const [method, path] = key.split(' ') as [string, string]
        const query = routeOf(key).query ? '?table=summary' : ''
        expect((await clients.get(role)!.send(method, path.replace(':id', id) + query, undefined, {})).status, `${role} ${key}`).toBe(404)
      }
      const list = await (await clients.get(role)!.get('/api/jobs?limit=100')).text()
      expect(list).not.toContain(id)
    }
    expect((await foreign.get(`/api/jobs/${id}`)).status).toBe(200)
  })

  it('is read by all of its team and changed by its owner and an admin alone', async () => {
    const owner = clients.get('researcher')!
    const colleague = await signIn('colleague@example.org')
    const { id } = await submit(owner, switchingSpec({ trials: 200_000 }))
    for (const reader of [colleague, clients.get('student')!, clients.get('admin')!]) {
      const reply = await reader.get(`/api/jobs/${id}`)
      expect(reply.status).toBe(200)
      expect(await reply.json()).toMatchObject({ id, own: false })
    }
    expect((await colleague.post(`/api/jobs/${id}/cancel`, {})).status).toBe(403)
    expect((await colleague.delete(`/api/jobs/${id}`)).status).toBe(403)
    expect((await clients.get('student')!.post(`/api/jobs/${id}/cancel`, {})).status).toBe(403)
    expect((await clients.get('admin')!.post(`/api/jobs/${id}/cancel`, {})).status).toBe(200)
    expect((await clients.get('admin')!.delete(`/api/jobs/${id}`)).status).toBe(204)
  })
})
