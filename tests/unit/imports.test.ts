import { readFileSync, readdirSync, statSync } from 'node:fs'
import { dirname, join, relative } from 'node:path'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'

const ROOT = fileURLToPath(new URL('../..', import.meta.url))
const ROOMS = ['app', 'server', 'shared', 'workers']

function sources(directory: string): string[] {
  return readdirSync(join(ROOT, directory), { withFileTypes: true }).flatMap((entry) => {
    const path = join(directory, entry.name)
    if (entry.isDirectory()) return sources(path)
    return /\.(ts|mjs|vue)$/.test(entry.name) && !entry.name.endsWith('.d.ts') ? [path] : []
  })
}

function resolveImport(from: string, specifier: string): string | null {
  const base = specifier.startsWith('.')
    ? join(dirname(from), specifier)
    : specifier.startsWith('#shared/') ? specifier.slice(1) : specifier.startsWith('~/') ? join('app', specifier.slice(2)) : null
  if (base === null) return null
  return ['', '.ts', '.mjs', '.vue', '/index.ts'].map(ending => base + ending).find((path) => {
    try {
      return statSync(join(ROOT, path)).isFile()
    }
    catch {
      return false
    }
  }) ?? null
}

/** Imports that remain when the program runs: those of types alone vanish. */
function importsOf(file: string): string[] {
  const text = readFileSync(join(ROOT, file), 'utf8')
  const found = text.matchAll(/^\s*(?:import|export)\s+(?!type\b)(?:[^'"`;]*?\bfrom\s+)?'([^']+)'/gm)
  return [...found].map(match => resolveImport(file, match[1]!)).filter(path => path !== null)
}

/** The first circle of imports found in the graph, as a list that ends where it began; empty when there is none. */
function circle(graph: ReadonlyMap<string, readonly string[]>): string[] {
  const done = new Set<string>()
  const path: string[] = []
  const visit = (file: string): string[] => {
    if (path.includes(file)) return [...path.slice(path.indexOf(file)), file]
    if (done.has(file)) return []
    path.push(file)
    for (const next of graph.get(file) ?? []) {
      const found = visit(next)
      if (found.length > 0) return found
    }
    path.pop()
    done.add(file)
    return []
  }
  for (const file of graph.keys()) {
    const found = visit(file)
    if (found.length > 0) return found
  }
  return []
}

const files = ROOMS.flatMap(sources)
const graph = new Map(files.map(file => [file, importsOf(file)]))

describe('imports', () => {
  it('finds a circle where there is one', () => {
    expect(circle(new Map([['a', ['b']], ['b', ['c']], ['c', ['b']]]))).toEqual(['b', 'c', 'b'])
  })

  it('form no circle', () => {
    expect(files.length).toBeGreaterThan(50)
    expect(circle(graph)).toEqual([])
  })

  it('follow the arrows between the rooms', () => {
    const allowed: Record<string, readonly string[]> = { app: ['app', 'shared'], server: ['server', 'shared'], workers: ['workers', 'server', 'shared'], shared: ['shared'] }
    const room = (file: string) => relative('.', file).split('/')[0]!
    const wrong = [...graph].flatMap(([file, imports]) => imports.filter(target => !allowed[room(file)]!.includes(room(target))).map(target => `${file} → ${target}`))
    expect(wrong).toEqual([])
    const workersUse = [...graph].filter(([file]) => room(file) === 'workers').flatMap(([, imports]) => imports)
    expect(workersUse.filter(target => room(target) === 'server' && !/^server\/(models|queue|mail|migrations)\//.test(target))).toEqual([])
  })

  it('let one file each speak with mail servers and play one', () => {
    const using = (pattern: RegExp) => files.filter(file => pattern.test(readFileSync(join(ROOT, file), 'utf8')))
    expect(using(/from 'nodemailer'/)).toEqual(['server/mail/transport.ts'])
    expect(using(/from 'smtp-server'/)).toEqual(['server/launch/catcher.ts'])
  })
})
