import { readFileSync, readdirSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'
import { ROLES } from '#shared/schemas/api'
import { openApiDocument } from '../../server/utils/openapi'
import { ROUTES, methodsOf, routeOf } from '../../server/utils/routes'
import type { RouteKey } from '../../server/utils/routes'

const SERVER = fileURLToPath(new URL('../../server/', import.meta.url))
const files = ['api', 'routes'].flatMap(room => readdirSync(SERVER + room, { recursive: true, encoding: 'utf8' }).map(file => `${room}/${file}`)).filter(file => file.endsWith('.ts'))
const keys = Object.keys(ROUTES) as RouteKey[]

/** `api/jobs/[id]/export.csv.get.ts` → `GET /api/jobs/:id/export.csv`, as the server reads file names. */
function keyOf(file: string): string {
  const [, path, method] = /^(.*)\.(get|post|put|patch|delete)\.ts$/.exec(file.replaceAll('\\', '/')) ?? []
  if (path === undefined || method === undefined) throw new Error(`${file} names no method`)
  return `${method.toUpperCase()} /${path.replace(/^routes\//, '').replace(/\[(\w+)\]/g, ':$1').replace(/\/index$/, '')}`
}

describe('the route registry', () => {
  it('has an entry for every file in server/api and server/routes, and the file defines that very route', () => {
    for (const file of files) {
      const source = readFileSync(SERVER + file, 'utf8')
      const defined = [...source.matchAll(/defineRoute\('([^']+)'/g)].map(match => match[1])
      expect(defined, file).toEqual([keyOf(file)])
      expect(keys, file).toContain(keyOf(file))
      expect(source, file).not.toMatch(/defineEventHandler|eventHandler\(/)
    }
  })

  it('has a file for every entry', () => {
    expect(files.map(keyOf).sort()).toEqual([...keys].sort())
  })

  it('gives every route a rule, and lets nobody in unnamed but to sign in, to follow a mailed link and to look whether the server lives', () => {
    for (const key of keys) {
      const { roles } = routeOf(key)
      if (roles === 'public') continue
      expect(roles.length, key).toBeGreaterThan(0)
      for (const role of roles) expect(ROLES).toContain(role)
    }
    expect(keys.filter(key => routeOf(key).roles === 'public').sort()).toEqual([
      'GET /health', 'GET /health/live', 'GET /health/ready', 'POST /api/invitations/accept', 'POST /api/invitations/look', 'POST /api/password-resets', 'POST /api/password-resets/confirm', 'POST /api/session',
    ])
  })

  it('lets a student write nothing but the own session, name, password and choice of mails', () => {
    const writes = keys.filter(key => !key.startsWith('GET ') && routeOf(key).roles !== 'public' && routeOf(key).roles.includes('student'))
    expect(writes.sort()).toEqual(['DELETE /api/session', 'DELETE /api/sessions/:id', 'PATCH /api/me', 'POST /api/me/password'])
  })

  it('knows the methods of a path', () => {
    expect(methodsOf('/api/jobs')).toEqual(['GET', 'HEAD', 'POST'])
    expect(methodsOf('/api/jobs/abc')).toEqual(['GET', 'HEAD', 'DELETE'])
    expect(methodsOf('/api/jobs/abc/cancel')).toEqual(['POST'])
    expect(methodsOf('/api/jobs/abc/exportXcsv')).toEqual([])
    expect(methodsOf('/api/_auth/session')).toEqual([])
    expect(methodsOf('/api/jobs/')).toEqual([])
  })
})

describe('the API document', () => {
  const document = openApiDocument({ baseUrl: 'https://farpole.example.org', version: '1.0.0' })

  it('has every route, with parameters, body and reply', () => {
    for (const key of keys) {
      const [method, path] = key.split(' ') as [string, string]
      const operation = document.paths?.[path.replace(':id', '{id}')]?.[method.toLowerCase() as 'get']
      expect(operation?.summary, key).toBe(routeOf(key).summary)
      expect(Object.keys(operation?.responses ?? {}), key).toContain(String(routeOf(key).status))
      expect(operation?.requestBody !== undefined, key).toBe(routeOf(key).body !== undefined)
    }
  })

  it('carries units and limits of the quantities, and names each operation once', () => {
    const text = JSON.stringify(document)
    expect(text).toContain('"maximum":2')
    expect(text).toContain('kA/m')
    const ids = [...text.matchAll(/"operationId":"(\w+)"/g)].map(match => match[1])
    expect(new Set(ids).size).toBe(keys.length)
  })
})
