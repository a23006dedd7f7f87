import { rmSync } from 'node:fs'
import { join } from 'node:path'
import { requireBuild } from '../../server/launch/build.mjs'
import { ROOT, openLayout } from '../../server/launch/layout.mjs'
import type { Running } from '../../server/launch/processes.mjs'
import { claim, sweep } from '../../server/launch/runFile.mjs'
import { openSecrets } from '../../server/launch/secrets.mjs'
import type { Stack } from '../../server/launch/stack.mjs'
import { makeStack, migrateStack, startDatabase, startMailCatcher, startQueueStore, startWeb, startWorker } from '../../server/launch/stack.mjs'

/** First of the ten ports that tests use; TEST_PORT in the environment moves them. */
const FIRST_PORT = Number(process.env.TEST_PORT ?? 4880)

/** What a test process needs to reach an installation that another process started. */
export interface StackInfo {
  baseUrl: string
  env: Record<string, string>
  dataDirectory: string
  logDirectory: string
}

/**
 * A whole private installation for tests: MariaDB, Redis, web servers and workers from the build, with fresh data.
 * Its parts can be killed and started one by one.
 */
export class TestStack {
  database: Running | null = null
  redis: Running | null = null
  mail: Running | null = null
  readonly webs: Running[] = []
  readonly workers: Running[] = []
  #started = 0

  private constructor(
    readonly stack: Stack,
    private readonly claimed: Awaited<ReturnType<typeof claim>>,
  ) {}

  /** Starts an installation whose data live in `.data/test/<name>`; nothing of an earlier one is kept. */
  static async start(name: string, { workers = 1, webs = 1, mail = true, env = {}, seed = ['--seed-demo', '--without-jobs'] }: { workers?: number, webs?: number, mail?: boolean, env?: Record<string, string>, seed?: string[] } = {}): Promise<TestStack> {
    const directory = join(ROOT, '.data', 'test', name)
    await sweep(openLayout(directory))
    rmSync(directory, { recursive: true, force: true })
    const layout = openLayout(directory)
    await requireBuild(layout, webs > 0 ? ['web', 'workers'] : ['workers'])
    const ports = { web: FIRST_PORT, database: FIRST_PORT + 1, redis: FIRST_PORT + 2, mail: FIRST_PORT + 9 }
    const stack = makeStack({ layout, ports, secrets: openSecrets(layout), mode: 'test', overrides: env })
    const own = new TestStack(stack, await claim(layout, stack.baseUrl))
    try {
      await Promise.all([own.startDatabase(), own.startRedis(), mail ? own.startMail() : null])
      await migrateStack(stack, seed)
      for (let k = 0; k < webs; k++) await own.startWeb()
      for (let k = 0; k < workers; k++) await own.startWorker()
    }
    catch (error) {
      await own.stop()
      throw error
    }
    return own
  }

  /** What other processes need to reach it. */
  get info(): StackInfo {
    const env = Object.fromEntries(Object.entries(this.stack.env).filter((entry): entry is [string, string] => entry[1] !== undefined))
    return { baseUrl: this.stack.baseUrl, env, dataDirectory: this.stack.layout.data, logDirectory: this.stack.layout.log }
  }

  async startDatabase(): Promise<Running> {
    this.database = this.#keep(await startDatabase(this.stack, { bufferPool: '128M' }))
    return this.database
  }

  async startRedis(extra: string[] = []): Promise<Running> {
    this.redis = this.#keep(await startQueueStore(this.stack, { extra }))
    return this.redis
  }

  async startMail(): Promise<Running> {
    this.mail = this.#keep(await startMailCatcher(this.stack))
    return this.mail
  }

  /** Starts a web server: the first on the stack's own address, others on the ports above the services'. */
  async startWeb(env: Record<string, string> = {}): Promise<Running> {
    const place = this.webs.findIndex(web => web.ended !== null)
    const k = place === -1 ? this.webs.length : place
    const web = this.#keep(await startWeb(this.stack, { port: k === 0 ? FIRST_PORT : FIRST_PORT + 2 + k, name: `web-${k}`, env: { ...this.stack.env, ...env } }))
    this.webs[k] = web
    return web
  }

  /** Address of the web server with this number. */
  webUrl(k: number): string {
    return `http://127.0.0.1:${k === 0 ? FIRST_PORT : FIRST_PORT + 2 + k}`
  }

  async startWorker(env: Record<string, string> = {}): Promise<Running> {
    const worker = this.#keep(await startWorker(this.stack, { name: `worker-${this.#started++}`, env: { ...this.stack.env, ...env } }))
    this.workers.push(worker)
    return worker
  }

  #keep(running: Running): Running {
    this.claimed.add(running)
    return running
  }

  /** Ends everything and waits for it. */
  async stop(): Promise<void> {
    await Promise.all([...this.workers, ...this.webs].map(running => running.stop()))
    await Promise.all([this.mail?.stop(), this.redis?.stop(), this.database?.stop()])
    this.claimed.release()
  }
}
