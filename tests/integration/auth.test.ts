import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { meSchema } from '#shared/schemas/api'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import type { User } from '../../server/models/people'
import { addUser, addressOf } from '../support/people'
import { Client, account, openTestDatabase, signIn, theStack, waitFor } from './harness'

let db: Database
let user: User

beforeAll(async () => {
  db = openTestDatabase()
  user = await addUser(db)
})
afterAll(() => closeDatabase(db))

const anonymous = () => new Client(theStack().baseUrl)
const status = async (client: Client, path = '/api/me') => (await client.get(path)).status

describe('signing in', () => {
  it('answers with the user and a cookie that scripts and other sites cannot use', async () => {
    const reply = await anonymous().post('/api/session', { ...account('researcher'), email: account('researcher').email.toUpperCase() })
    expect(reply.status).toBe(200)
    expect(meSchema.parse(await reply.json()).user.role).toBe('researcher')
    const [cookie] = reply.headers.getSetCookie()
    expect(cookie).toMatch(/HttpOnly/i)
    expect(cookie).toMatch(/SameSite=Lax/i)
    expect(reply.headers.get('cache-control')).toBe('no-store')
    expect(cookie).not.toContain(account('researcher').email)
  })

  it('answers alike for an unknown address and a wrong password, after the same work', async () => {
    const timed = async (email: string) => {
      const started = performance.now()
      const reply = await anonymous().post('/api/session', { email, password: 'not the password' })
      const { requestId, ...body } = await reply.json() as Record<string, unknown>
      return { requestId, body, status: reply.status, ms: performance.now() - started }
    }
    await timed('first@example.org')
    const known = await timed(user.email)
    const unknown = await timed('nobody@example.org')
    expect(known.status).toBe(401)
    expect([unknown.status, unknown.body]).toEqual([known.status, known.body])
    expect(unknown.ms).toBeGreaterThan(known.ms / 3)
    expect(known.ms).toBeGreaterThan(unknown.ms / 3)
  })

  it('makes an account wait after many attempts, and says how long', async () => {
    const client = anonymous()
    const victim = await addUser(db)
    const attempt = () => client.post('/api/session', { email: victim.email, password: 'guess' })
    for (let k = 0; k < 8; k++) expect((await attempt()).status).toBe(401)
    const refused = await client.post('/api/session', { ...account('researcher'), email: victim.email })
    expect(refused.status).toBe(429)
    expect(Number(refused.headers.get('retry-after'))).toBeGreaterThan(0)
    await expect(signIn('researcher')).resolves.toBeInstanceOf(Client)
  })

  it('needs both values and takes no others', async () => {
    expect((await anonymous().post('/api/session', { email: 'x', password: '' })).status).toBe(422)
    expect((await anonymous().post('/api/session', { ...account('student'), role: 'admin' })).status).toBe(422)
    expect((await anonymous().post('/api/session')).status).toBe(400)
  })
})

describe('a session', () => {
  it('is gone after signing out, also for whoever kept the cookie', async () => {
    const client = await signIn(addressOf(user))
    const kept = new Client(client.baseUrl, client.cookie)
    expect(await status(kept)).toBe(200)
    expect((await client.delete('/api/session')).status).toBe(204)
    expect(await status(kept)).toBe(401)
    expect(client.cookie).toMatch(/=$/)
  })

  it('gets a new id at each sign-in, and the old one ends', async () => {
    const client = await signIn(addressOf(user))
    const old = new Client(client.baseUrl, client.cookie)
    const again = await client.post('/api/session', { email: user.email, password: account('student').password })
    expect(again.status).toBe(200)
    expect(client.cookie).not.toBe(old.cookie)
    expect(await status(client)).toBe(200)
    expect(await status(old)).toBe(401)
  })

  it('does not survive a changed seal', async () => {
    const client = await signIn(addressOf(user))
    const at = Math.floor(client.cookie.length / 2)
    const changed = client.cookie.slice(0, at) + (client.cookie[at] === 'A' ? 'B' : 'A') + client.cookie.slice(at + 1)
    expect(await status(new Client(client.baseUrl, changed))).toBe(401)
  })

  it('ends when the user is disabled, when it is old and when it was idle', async () => {
    const one = await addUser(db)
    const client = await signIn(addressOf(one))
    await one.update({ active: false })
    expect(await status(client)).toBe(401)
    expect((await anonymous().post('/api/session', { email: one.email, password: account('student').password })).status).toBe(401)
    await one.update({ active: true })
    expect(await status(client)).toBe(200)
    const where = { userId: one.id }
    await db.models.Session.update({ lastSeenAt: new Date(Date.now() - 13 * 3_600_000) }, { where })
    expect(await status(client)).toBe(401)
    await db.models.Session.update({ lastSeenAt: new Date(), expiresAt: new Date(Date.now() - 1000) }, { where })
    expect(await status(client)).toBe(401)
  })

  it('carries no role: a demotion counts at the next request', async () => {
    const one = await addUser(db, { role: 'admin' })
    const client = await signIn(addressOf(one))
    expect(await status(client, '/api/people')).toBe(200)
    await one.update({ role: 'student' })
    expect(await status(client, '/api/people')).toBe(403)
  })

  it('cannot be read or ended through the session routes that the framework’s module brings', async () => {
    const client = await signIn(addressOf(user))
    expect(await status(client, '/api/_auth/session')).toBe(404)
    expect((await client.delete('/api/_auth/session')).status).toBe(404)
    expect(await status(client)).toBe(200)
  })
})

describe('the origin of a write', () => {
  it.each([['foreign', 'https://evil.example.org'], ['null', 'null'], ['a look-alike', `${theStack().baseUrl}.example.org`]])('%s is refused', async (_, origin) => {
    const client = await signIn(addressOf(user))
    expect((await client.post('/api/presets', {}, { Origin: origin })).status).toBe(403)
    expect((await client.delete('/api/session', { Origin: origin })).status).toBe(403)
    expect(await status(client)).toBe(200)
    expect((await anonymous().post('/api/session', account('student'), { Origin: origin })).status).toBe(403)
  })

  it('missing is refused too', async () => {
    const client = await signIn(addressOf(user))
    const reply = await fetch(`${client.baseUrl}/api/session`, { method: 'DELETE', headers: { Cookie: client.cookie } })
    expect(reply.status).toBe(403)
  })
})

describe('an open event stream', () => {
  it.each([
    ['the session ends', (one: User) => db.models.Session.update({ revokedAt: new Date() }, { where: { userId: one.id } })],
    ['the user is disabled', (one: User) => one.update({ active: false })],
    ['the user’s role changes', (one: User) => one.update({ role: 'student' })],
  ])('closes when %s', async (_, change) => {
    const one = await addUser(db)
    const client = await signIn(addressOf(one))
    const reply = await client.get('/api/events')
    expect(reply.headers.get('content-type')).toContain('text/event-stream')
    const reader = reply.body!.getReader()
    await reader.read()
    let over = false
    const drained = (async () => {
      while (!(await reader.read()).done) continue
      over = true
    })()
    await change(one)
    await waitFor('the stream to close', () => over, 8000)
    await drained
  })
})
