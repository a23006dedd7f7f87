import { spawnSync } from 'node:child_process'
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { build } from 'esbuild'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { chunkJob, mergeChunks, openChunk } from '#shared/physics/engine'
import { answerSchema } from '#shared/schemas/answer'
import { unpackArrays } from '#shared/utils/arrays'
import { reducedSpec } from '../support/specs'

const root = fileURLToPath(new URL('../..', import.meta.url))
const SPEC = reducedSpec({ stability: 40, drive: 4, width: 6, trials: 60, seed: 3 })

describe('The solve command', () => {
  let directory = ''
  const at = (name: string) => join(directory, name)
  const solve = (args: string[], input = '') => spawnSync(process.execPath, [at('solve.mjs'), ...args], { input, encoding: 'utf8' })

  beforeAll(async () => {
    directory = mkdtempSync(join(tmpdir(), 'farpole-solve-'))
    await build({
      absWorkingDir: root, entryPoints: ['workers/solve.ts'], outfile: at('solve.mjs'), bundle: true, platform: 'node', format: 'esm', target: 'node20',
      alias: { '#shared': './shared' }, tsconfigRaw: {}, logLevel: 'error',
    })
  })
  afterAll(() => rmSync(directory, { recursive: true, force: true }))

  it('prints the answer with the bytes of any other run of the job', () => {
    const parts = chunkJob(SPEC, 1e-3).map(({ firstTrial, trialCount }) => {
      const run = openChunk(SPEC, firstTrial, trialCount)
      while (run.done < run.total) run.advance()
      return run.finish()
    })
    expect(parts.length).toBeGreaterThan(1)
    const { answer, paths } = mergeChunks(SPEC, parts)
    const { status, stdout, stderr } = solve(['-', '--paths', at('paths.bin')], JSON.stringify(SPEC))
    expect([status, stderr]).toEqual([0, ''])
    expect(answerSchema.parse(JSON.parse(stdout)).complete).toBe(true)
    expect(stdout).toBe(`${JSON.stringify(answer)}\n`)
    expect(unpackArrays(readFileSync(at('paths.bin'))).arrays.paths).toEqual(paths)
  })

  it('reads a file', () => {
    writeFileSync(at('job.json'), JSON.stringify(SPEC))
    expect(solve([at('job.json')]).status).toBe(0)
    const missing = solve([at('nowhere.json')])
    expect([missing.status, missing.stdout]).toEqual([1, ''])
    expect(missing.stderr).toContain('nowhere.json')
  })

  it('lists every fault of a job by its field', () => {
    const { status, stdout, stderr } = solve(['-'], JSON.stringify({ ...SPEC, device: { ...SPEC.device, damping: -1 }, owner: 'me' }))
    expect([status, stdout]).toEqual([2, ''])
    expect(stderr).toContain('/device/damping: ')
    expect(stderr).toContain('owner')
    expect(solve(['-'], '{"question":').stderr).toContain('not JSON')
  })

  it('names the field that describes no device', () => {
    const { status, stderr } = solve(['-'], JSON.stringify({ ...SPEC, device: { ...SPEC.device, anisotropy: { kind: 'interface', interfaceAnisotropy: 1e-6 } } }))
    expect(status).toBe(2)
    expect(stderr).toMatch(/^ {2}\/device\/\S+: /m)
  })

  it('prints the schema of a job and how to use it', () => {
    const schema: unknown = JSON.parse(solve(['--schema']).stdout)
    expect(schema).toMatchObject({ type: 'object', required: expect.arrayContaining(['question', 'device', 'write']) })
    expect(solve(['--help']).stdout).toContain('npm run solve -- job.json')
    expect(solve([]).status).toBe(1)
  })
})
