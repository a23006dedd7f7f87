import { connect } from 'node:net'
import { beforeAll, describe, expect, it } from 'vitest'
import type { Client } from './harness'
import { Client as Visitor, signIn, switchingSpec, theStack } from './harness'

let client: Client
beforeAll(async () => {
  client = await signIn('researcher')
})

const key = { 'Idempotency-Key': 'requests-0001' }

/** Sends bytes as they are and answers what comes back until the server closes. */
function raw(text: string, pieces: string[] = []): Promise<string> {
  return new Promise((resolve, reject) => {
    const { hostname, port } = new URL(theStack().baseUrl)
    const socket = connect(Number(port), hostname)
    let reply = ''
    socket.setTimeout(8000, () => socket.destroy())
    socket.on('data', part => reply += part)
    socket.on('error', error => reply ? resolve(reply) : reject(error))
    socket.on('close', () => resolve(reply))
    socket.write(text)
    for (const piece of pieces) socket.write(piece)
  })
}

describe('bodies over the wire', () => {
  it('are refused when too long, announced or in chunks', async () => {
    const long = JSON.stringify({ ...switchingSpec(), note: 'x'.repeat(300_000) })
    expect((await client.post('/api/jobs', long, key)).status).toBe(413)
    const head = [
      'POST /api/jobs HTTP/1.1', 'Host: farpole', `Origin: ${client.baseUrl}`, `Cookie: ${client.cookie}`, 'Content-Type: application/json',
      'Idempotency-Key: requests-0001', 'Transfer-Encoding: chunked', '', '',
    ].join('\r\n')
    const chunk = `10000\r\n${'x'.repeat(0x10000)}\r\n`
    expect(await raw(head, Array.from({ length: 6 }, () => chunk))).toMatch(/^HTTP\/1\.1 413 /)
  })

  it('have to be JSON', async () => {
    expect((await client.post('/api/jobs', 'a=1', { ...key, 'Content-Type': 'application/x-www-form-urlencoded' })).status).toBe(415)
    expect((await client.post('/api/jobs', '{"a":', key)).status).toBe(400)
    expect((await client.post('/api/jobs', undefined, key)).status).toBe(400)
    expect((await client.post('/api/jobs', '{"__proto__":{"role":"admin"}}', key)).status).toBe(422)
    expect((await client.delete('/api/session', { 'X-Other': '1' })).status).toBe(204)
    client = await signIn('researcher')
  })
})

describe('every reply of the API', () => {
  it('is not stored, not sniffed, named by an id, and says nothing of what runs behind it', async () => {
    for (const reply of [await client.get('/api/me'), await client.get('/api/nothing'), await new Visitor(client.baseUrl).get('/api/me')]) {
      expect(reply.headers.get('cache-control')).toBe('no-store')
      expect(reply.headers.get('x-content-type-options')).toBe('nosniff')
      expect(reply.headers.get('x-request-id')).toMatch(/^[0-9a-f-]{36}$/)
      expect(reply.headers.get('x-powered-by')).toBeNull()
      expect(reply.headers.get('access-control-allow-origin')).toBeNull()
    }
  })

  it('to a stranger sets no cookie', async () => {
    const reply = await new Visitor(client.baseUrl).get('/api/me')
    expect(reply.status).toBe(401)
    expect(reply.headers.getSetCookie()).toEqual([])
  })
})

describe('pages', () => {
  it('carry the policy: scripts by nonce, no eval, no frames', async () => {
    const reply = await new Visitor(client.baseUrl).get('/signin')
    expect(reply.status).toBe(200)
    const policy = reply.headers.get('content-security-policy') ?? ''
    expect(policy).toMatch(/script-src [^;]*'nonce-[^']+'/)
    expect(policy).not.toMatch(/'unsafe-eval'/)
    expect(policy.match(/script-src [^;]*/)?.[0]).not.toContain('unsafe-inline')
    expect(policy).toContain('frame-ancestors \'none\'')
    expect(reply.headers.get('strict-transport-security')).toMatch(/max-age=31536000/)
    expect(reply.headers.get('x-content-type-options')).toBe('nosniff')
    expect(reply.headers.get('cross-origin-opener-policy')).toBe('same-origin')
    expect(reply.headers.get('x-powered-by')).toBeNull()
  })

  it('differ in their nonce', async () => {
    const nonce = async () => /'nonce-([^']+)'/.exec((await new Visitor(client.baseUrl).get('/signin')).headers.get('content-security-policy') ?? '')?.[1]
    expect(await nonce()).not.toBe(await nonce())
  })
})
