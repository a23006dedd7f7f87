import { readFileSync } from 'node:fs'
import { availableParallelism } from 'node:os'
import { join } from 'node:path'
import { LaunchError } from './messages.mjs'
import { ROOT } from './layout.mjs'
import { USERS, query, startMariadb } from './mariadb.mjs'
import { exchange } from './ports.mjs'
import { run, startProcess, waitUntil } from './processes.mjs'
import { startRedis } from './redis.mjs'

/**
 * One private installation on loopback: its places, ports, passwords and the environment of its programs.
 * @typedef {object} Stack
 * @property {import('./layout.mjs').Layout} layout
 * @property {Ports} ports
 * @property {Record<string, string>} secrets
 * @property {NodeJS.ProcessEnv} env
 * @property {string} baseUrl
 * @typedef {{ web: number, database: number, redis: number, mail: number }} Ports
 */

/** The people of the demo team with the password that they share. @returns {{ email: string, password: string, role: string }[]} */
export function demoAccounts() {
  const demo = JSON.parse(readFileSync(join(ROOT, 'server/models/demo-team.json'), 'utf8'))
  return demo.people.map(({ email, role }) => ({ email, password: demo.password, role }))
}

/**
 * Environment of the application's programs: the caller's own, with every setting of this installation given.
 * @param {{ layout: import('./layout.mjs').Layout, ports: Ports, secrets: Record<string, string>, mode: 'demo' | 'test', overrides?: Record<string, string> }} parts
 * @returns {Stack}
 */
export function makeStack({ layout, ports, secrets, mode, overrides = {} }) {
  const baseUrl = (mode === 'demo' && process.env.FARPOLE_BASE_URL) || `http://127.0.0.1:${ports.web}`
  const inherited = Object.entries(process.env).filter(([name]) => mode === 'demo' || !name.startsWith('FARPOLE_'))
  const env = {
    ...Object.fromEntries(inherited),
    NODE_ENV: 'production',
    FARPOLE_ENV: mode,
    FARPOLE_BASE_URL: baseUrl,
    FARPOLE_WEB_PORT: String(ports.web),
    FARPOLE_DB_HOST: '127.0.0.1',
    FARPOLE_DB_PORT: String(ports.database),
    FARPOLE_DB_NAME: 'farpole',
    FARPOLE_DB_USER: USERS.application.name,
    FARPOLE_DB_PASSWORD: secrets.database,
    FARPOLE_REDIS_HOST: '127.0.0.1',
    FARPOLE_REDIS_PORT: String(ports.redis),
    FARPOLE_REDIS_PASSWORD: secrets.redis,
    FARPOLE_SESSION_SECRET: secrets.session,
    FARPOLE_MAIL_URL: `smtp://127.0.0.1:${ports.mail}`,
    FARPOLE_MAIL_FROM: 'farpole@example.org',
    FARPOLE_DEMO_MAIL_DIR: layout.mail,
    NUXT_PUBLIC_DEMO_ACCOUNTS: JSON.stringify(demoAccounts()),
    FARPOLE_WORKER_SLOTS: (mode === 'demo' && process.env.FARPOLE_WORKER_SLOTS) || String(availableParallelism()),
    ...overrides,
  }
  // The launcher's own settings, unknown to the application.
  delete env.FARPOLE_DATA_DIR
  delete env.FARPOLE_MAIL_PORT
  return { layout, ports, secrets, env, baseUrl }
}

/** Starts the stack's MariaDB. @param {Stack} stack @param {{ bufferPool?: string }} [options] */
export const startDatabase = (stack, options) => startMariadb(stack.layout, stack.ports.database, stack.secrets, options)

/** Starts the stack's Redis. @param {Stack} stack @param {{ extra?: string[] }} [options] */
export const startQueueStore = (stack, options) => startRedis(stack.layout, stack.ports.redis, stack.secrets, options)

/** Starts the catcher of the stack's mail from the build and waits until it answers. @param {Stack} stack */
export async function startMailCatcher(stack) {
  const running = startProcess({
    name: 'The mail catcher', command: process.execPath, args: [join(ROOT, 'dist/catcher.mjs')], cwd: ROOT, env: stack.env, log: join(stack.layout.log, 'mail.log'),
  })
  const greets = async () => (await exchange(stack.ports.mail, '', reply => reply.includes('\n')))?.startsWith('220') ?? false
  await orStop(running, () => waitUntil(running, greets, 20_000))
  return running
}

/**
 * Brings the schema up to date as the user that may, and adds what the arguments ask for. Throws LaunchError with the reason.
 * @param {Stack} stack @param {string[]} [args]
 */
export async function migrateStack(stack, args = []) {
  const env = { ...stack.env, FARPOLE_DB_USER: USERS.schema.name, FARPOLE_DB_PASSWORD: stack.secrets.schema }
  const { code, stdout, stderr } = await run(process.execPath, [join(ROOT, 'dist/migrate.mjs'), ...args], { cwd: ROOT, env })
  if (code !== 0) throw new LaunchError(`The database could not be brought up to date: ${stderr.trim() || stdout.trim()}`)
  return stdout.trim()
}

/**
 * Starts a web server from the build and waits until it answers.
 * @param {Stack} stack
 * @param {{ port?: number, name?: string, env?: NodeJS.ProcessEnv, command?: string[], withinMs?: number }} [options]
 */
export async function startWeb(stack, { port = stack.ports.web, name = 'web', env = stack.env, command = [join(ROOT, 'dist/web.mjs')], withinMs = 60_000 } = {}) {
  const running = startProcess({
    name: 'The web server', command: process.execPath, args: command, cwd: ROOT,
    env: { ...env, FARPOLE_WEB_PORT: String(port) }, log: join(stack.layout.log, `${name}.log`),
  })
  const answers = async () => {
    try {
      const reply = await fetch(`http://127.0.0.1:${port}/health/ready`, { signal: AbortSignal.timeout(2000) })
      return reply.ok
    }
    catch {
      return false
    }
  }
  await orStop(running, () => waitUntil(running, answers, withinMs))
  return running
}

/**
 * Starts a worker from the build and waits until its heartbeat is in the database.
 * @param {Stack} stack @param {{ name?: string, env?: NodeJS.ProcessEnv }} [options]
 */
export async function startWorker(stack, { name = 'worker', env = stack.env } = {}) {
  const running = startProcess({
    name: 'The solver worker', command: process.execPath, args: ['--enable-source-maps', join(ROOT, 'dist/worker.mjs')], cwd: ROOT,
    env, log: join(stack.layout.log, `${name}.log`),
  })
  const beats = async () => {
    const { stdout } = await query(stack.layout, `SELECT COUNT(*) FROM farpole.workers WHERE pid = ${running.pid} AND heartbeatAt > UTC_TIMESTAMP() - INTERVAL 30 SECOND`)
    return stdout.trim() !== '' && stdout.trim() !== '0'
  }
  await orStop(running, () => waitUntil(running, beats, 60_000, 250))
  return running
}

async function orStop(running, wait) {
  try {
    await wait()
  }
  catch (error) {
    await running.stop()
    throw error
  }
}
