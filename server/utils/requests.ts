import type { IncomingMessage } from 'node:http'
import { HttpProblem } from './problems'

/** Most bytes of a request's body. */
export const BODY_LIMIT = 256 * 1024
const DEPTH_LIMIT = 12
const UNSAFE_KEYS = new Set(['__proto__', 'constructor', 'prototype'])

/**
 * Reads and parses a JSON body; undefined when there is none. Counts the bytes as they come, so that the limit holds
 * without Content-Length too.
 * @throws HttpProblem too-large, unsupported-media-type, malformed, invalid
 */
export async function readJsonBody(request: IncomingMessage): Promise<unknown> {
  if (Number(request.headers['content-length'] ?? 0) > BODY_LIMIT) throw new HttpProblem('too-large', {}, { Connection: 'close' })
  const bytes = await readLimited(request)
  if (bytes.length === 0) return undefined
  if (!/^application\/json(\s*;\s*charset=utf-8)?\s*$/i.test(request.headers['content-type'] ?? '')) throw new HttpProblem('unsupported-media-type')
  let value: unknown
  try {
    value = JSON.parse(new TextDecoder('utf-8', { fatal: true }).decode(bytes))
  }
  catch {
    throw new HttpProblem('malformed', { detail: 'The body is not JSON in UTF-8.' })
  }
  refuseUnsafe(value, 0)
  return value
}

async function readLimited(request: IncomingMessage): Promise<Buffer> {
  const parts: Buffer[] = []
  let length = 0
  for await (const part of request) {
    const bytes = Buffer.from(part as Uint8Array)
    length += bytes.length
    if (length > BODY_LIMIT) throw new HttpProblem('too-large', {}, { Connection: 'close' })
    parts.push(bytes)
  }
  return Buffer.concat(parts)
}

function refuseUnsafe(value: unknown, depth: number): void {
  if (typeof value !== 'object' || value === null) return
  if (depth >= DEPTH_LIMIT) throw new HttpProblem('invalid', { detail: `Values are nested more than ${DEPTH_LIMIT} deep.` })
  for (const key of Object.keys(value)) {
    if (UNSAFE_KEYS.has(key)) throw new HttpProblem('invalid', { errors: [{ pointer: `/${key}`, detail: 'There is no such value.' }] })
  }
  for (const inner of Object.values(value)) refuseUnsafe(inner, depth + 1)
}

/** Query parameters of a URL, each at most once. @throws HttpProblem invalid */
export function readQuery(url: string): Record<string, string> {
  const at = url.indexOf('?')
  const found = new Map<string, string>()
  for (const [key, value] of new URLSearchParams(at < 0 ? '' : url.slice(at + 1))) {
    if (found.has(key) || UNSAFE_KEYS.has(key)) throw new HttpProblem('invalid', { errors: [{ pointer: `/${key}`, detail: 'Give this parameter once.' }] })
    found.set(key, value)
  }
  return Object.fromEntries(found)
}

/** The key of a creation, 8 to 80 visible ASCII characters. @throws HttpProblem idempotency-key-missing */
export function readIdempotencyKey(header: string | undefined): string {
  if (header === undefined || !/^[\x21-\x7E]{8,80}$/.test(header)) throw new HttpProblem('idempotency-key-missing')
  return header
}

/** Version that an edit starts from, of `If-Match: "4"`; −1 for a tag that no version has. @throws HttpProblem precondition-required */
export function readIfMatch(header: string | undefined): number {
  if (header === undefined) throw new HttpProblem('precondition-required')
  const [, version] = /^\s*"([1-9]\d{0,8})"\s*$/.exec(header) ?? []
  return version === undefined ? -1 : Number(version)
}
