import type { IncomingMessage } from 'node:http'
import { Readable } from 'node:stream'
import { describe, expect, it } from 'vitest'
import { BODY_LIMIT, readIdempotencyKey, readJsonBody, readQuery } from '../../server/utils/requests'

const JSON_TYPE = { 'content-type': 'application/json' }
/** A request as far as the reader of bodies looks at it. */
const request = (parts: (string | Uint8Array)[], headers: Record<string, string> = JSON_TYPE) =>
  Object.assign(Readable.from(parts.map(part => Buffer.from(part))), { headers }) as unknown as IncomingMessage
const refusal = (type: string) => expect.objectContaining({ name: 'HttpProblem', type })

describe('bodies', () => {
  it('reads JSON in pieces, and nothing as undefined', async () => {
    expect(await readJsonBody(request(['{"a":', '[1,2]}']))).toEqual({ a: [1, 2] })
    expect(await readJsonBody(request([], {}))).toBeUndefined()
    expect(await readJsonBody(request(['{}'], { 'content-type': 'application/json; charset=UTF-8' }))).toEqual({})
  })

  it('refuses too many bytes, announced or not', async () => {
    await expect(readJsonBody(request(['{}'], { ...JSON_TYPE, 'content-length': String(BODY_LIMIT + 1) }))).rejects.toEqual(refusal('too-large'))
    const piece = 'x'.repeat(BODY_LIMIT / 4)
    await expect(readJsonBody(request(['"', piece, piece, piece, piece, '"']))).rejects.toEqual(refusal('too-large'))
  })

  it.each(['text/plain', 'application/x-www-form-urlencoded', 'application/json; charset=latin1', 'multipart/form-data; boundary=x'])('refuses %s', async (type) => {
    await expect(readJsonBody(request(['{}'], { 'content-type': type }))).rejects.toEqual(refusal('unsupported-media-type'))
  })

  it('refuses what is not JSON in UTF-8', async () => {
    await expect(readJsonBody(request(['{"a":NaN}']))).rejects.toEqual(refusal('malformed'))
    await expect(readJsonBody(request([new Uint8Array([0x22, 0xFF, 0x22])]))).rejects.toEqual(refusal('malformed'))
  })

  it('refuses keys that reach into prototypes, at any depth, and deep nesting', async () => {
    await expect(readJsonBody(request(['{"__proto__":{"role":"admin"}}']))).rejects.toEqual(refusal('invalid'))
    await expect(readJsonBody(request(['{"a":[{"constructor":1}]}']))).rejects.toEqual(refusal('invalid'))
    await expect(readJsonBody(request(['['.repeat(100_000) + ']'.repeat(100_000)]))).rejects.toEqual(refusal('invalid'))
  })
})

describe('query parameters', () => {
  it('reads each once', () => {
    expect(readQuery('/api/jobs?limit=5&cursor=a%2Bb')).toEqual({ limit: '5', cursor: 'a+b' })
    expect(readQuery('/api/jobs')).toEqual({})
  })

  it('refuses doubles and prototype keys', () => {
    expect(() => readQuery('/x?a=1&a=2')).toThrow(refusal('invalid'))
    expect(() => readQuery('/x?__proto__=1')).toThrow(refusal('invalid'))
  })
})

describe('Idempotency-Key', () => {
  it('takes 8 to 80 visible characters', () => {
    expect(readIdempotencyKey('a'.repeat(8))).toBe('aaaaaaaa')
    expect(readIdempotencyKey('~'.repeat(80))).toHaveLength(80)
    for (const bad of [undefined, '', 'short', 'a'.repeat(81), 'has space1', 'ümlaut-key']) expect(() => readIdempotencyKey(bad)).toThrow(refusal('idempotency-key-missing'))
  })
})
