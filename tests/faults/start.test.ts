import type { ChildProcess } from 'node:child_process'
import { spawn } from 'node:child_process'
import { mkdirSync, readFileSync, readdirSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { createServer } from 'node:net'
import { join } from 'node:path'
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest'
import { z } from 'zod'
import { jobListSchema } from '#shared/schemas/jobList'
import { requireBuild } from '../../server/launch/build.mjs'
import { ROOT, openLayout } from '../../server/launch/layout.mjs'
import { processStart } from '../../server/launch/processes.mjs'
import { sweep } from '../../server/launch/runFile.mjs'
import { signIn, waitFor } from '../integration/harness'
import { figure, since } from './stage'

const PORT = Number(process.env.TEST_PORT ?? 4880) + 7
const BASE = `http://127.0.0.1:${PORT}`
const DATA = join(ROOT, '.data/test/start')
const RUN_FILE = join(DATA, 'run/launch.json')
const runSchema = z.object({ pid: z.int(), children: z.array(z.object({ name: z.string(), pid: z.int(), start: z.number().nullable() })) })

/** One run of `npm start`'s script with ports and data of its own. */
class Start {
  output = ''
  code: number | null = null
  readonly child: ChildProcess
  readonly ended: Promise<number | null>
  readonly began = performance.now()

  constructor(env: Record<string, string> = {}) {
    const { TEST_PORT: _, ...own } = process.env
    this.child = spawn(process.execPath, [join(ROOT, 'server/launch/start.mjs')], {
      cwd: ROOT,
      env: { ...own, FARPOLE_DATA_DIR: DATA, FARPOLE_WEB_PORT: String(PORT), FARPOLE_DB_PORT: String(PORT + 1), FARPOLE_REDIS_PORT: String(PORT + 2), FARPOLE_MAIL_PORT: String(PORT - 1), FARPOLE_WORKER_SLOTS: '1', ...env },
    })
    for (const stream of [this.child.stdout, this.child.stderr]) stream?.setEncoding('utf8').on('data', (text: string) => { this.output += text })
    this.ended = new Promise((resolve) => {
      this.child.once('close', (code) => {
        this.code = code
        resolve(code)
      })
    })
  }

  /** Waits until it says that it answers. */
  async ready(): Promise<this> {
    await waitFor('the start to be ready', () => {
      if (this.code !== null) throw new Error(`It ended early:\n${this.output}`)
      return this.output.includes('Ctrl-C ends everything')
    }, 120_000)
    return this
  }

  async stop(signal: NodeJS.Signals = 'SIGTERM'): Promise<number | null> {
    if (this.code === null) this.child.kill(signal)
    return this.ended
  }
}

const readRun = () => runSchema.parse(JSON.parse(readFileSync(RUN_FILE, 'utf8')))
const alive = (children: readonly { pid: number, start: number | null }[]) => children.filter(({ pid, start }) => start !== null && processStart(pid) === start)
const starts: Start[] = []
const start = (env?: Record<string, string>) => {
  const one = new Start(env)
  starts.push(one)
  return one
}

beforeAll(async () => {
  await sweep(openLayout(DATA))
  rmSync(DATA, { recursive: true, force: true })
  await requireBuild(openLayout(DATA), ['web', 'workers'])
}, 600_000)

afterEach(async () => {
  for (const one of starts.splice(0)) await one.stop()
})

afterAll(async () => {
  await sweep(openLayout(DATA))
})

describe('npm start', () => {
  it('answers, refuses a second start beside it, ends everything on a signal and keeps the data', async () => {
    const first = await start().ready()
    expect(first.output).toContain(BASE)
    for (const role of ['researcher', 'student', 'admin']) expect(first.output).toContain(`${role}@example.org`)
    const researcher = await signIn('researcher', BASE)
    const jobs = jobListSchema.parse(await (await researcher.get('/api/jobs')).json()).jobs.map(job => job.id)
    expect(jobs.length).toBeGreaterThan(1)
    expect(statSync(join(DATA, 'secrets.json')).mode & 0o777).toBe(0o600)
    const secrets = z.record(z.string(), z.string()).parse(JSON.parse(readFileSync(join(DATA, 'secrets.json'), 'utf8')))
    const commandLines = readRun().children.map(({ pid }) => readFileSync(`/proc/${pid}/cmdline`, 'utf8')).join('\n')
    const logs = readdirSync(join(DATA, 'log')).map(file => readFileSync(join(DATA, 'log', file), 'utf8')).join('\n')
    for (const secret of Object.values(secrets)) {
      expect(commandLines).not.toContain(secret)
      expect(logs).not.toContain(secret)
    }

    const second = start()
    expect(await second.ended).toBe(1)
    expect(second.output).toContain(`already running here at ${BASE}`)

    const { children } = readRun()
    expect(alive(children)).toHaveLength(5)
    expect(await first.stop('SIGINT')).toBe(0)
    expect(alive(children)).toEqual([])

    const again = await start().ready()
    figure('second start', since(again.began))
    const kept = jobListSchema.parse(await (await researcher.get('/api/jobs')).json()).jobs.map(job => job.id)
    expect(kept).toEqual(jobs)
    expect(await again.stop()).toBe(0)
  }, 300_000)

  it('mends what a killed start left, and a database that was never finished', async () => {
    const first = await start().ready()
    const { children } = readRun()
    await first.stop('SIGKILL')
    rmSync(join(DATA, 'mariadb/data/farpole'), { recursive: true, force: true })
    await waitFor('the database to end with its launcher', () => alive(children.filter(({ name }) => name === 'MariaDB')).length === 0, 30_000)
    rmSync(join(DATA, 'mariadb/data'), { recursive: true })
    mkdirSync(join(DATA, 'mariadb/partial'))
    writeFileSync(join(DATA, 'mariadb/partial/ibdata1'), 'half of it')
    const second = await start().ready()
    expect(second.output).toContain('starting that over')
    expect(alive(children)).toEqual([])
    expect(await second.stop()).toBe(0)
  }, 300_000)

  it('starts a killed worker again, and stops with the last lines of the log when the web server dies', async () => {
    const one = await start().ready()
    const [worker] = readRun().children.filter(({ name }) => name.includes('worker'))
    process.kill(worker!.pid, 'SIGKILL')
    await waitFor('another worker', () => alive(readRun().children.filter(({ name, pid }) => name.includes('worker') && pid !== worker!.pid))[0], 60_000)
    expect(one.output).toContain('starting it again')
    const { children } = readRun()
    process.kill(children.find(({ name }) => name.includes('web'))!.pid, 'SIGKILL')
    expect(await one.ended).toBe(1)
    expect(one.output).toMatch(/web server ended by itself \(signal SIGKILL\), so everything is stopped\. Its last lines:/)
    expect(alive(children)).toEqual([])
  }, 300_000)

  it.each([['FARPOLE_WEB_PORT', PORT], ['FARPOLE_DB_PORT', PORT + 1], ['FARPOLE_REDIS_PORT', PORT + 2], ['FARPOLE_MAIL_PORT', PORT - 1]])('names %s when its port is taken', async (setting, port) => {
    const taker = createServer()
    await new Promise<void>(resolve => taker.listen(port, '127.0.0.1', resolve))
    try {
      const one = start()
      expect(await one.ended).toBe(1)
      expect(one.output).toContain(`Port ${port}`)
      expect(one.output).toContain(`${setting}=`)
      expect(one.output).not.toMatch(/\n\s+at /)
    }
    finally {
      taker.close()
    }
  }, 60_000)
})
