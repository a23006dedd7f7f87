import { createHash } from 'node:crypto'
import { chmodSync, mkdirSync, writeFileSync } from 'node:fs'
import { tmpdir, userInfo } from 'node:os'
import { join, relative, resolve } from 'node:path'
import { fileURLToPath } from 'node:url'
import { LaunchError } from './messages.mjs'

/** Top of the checkout. */
export const ROOT = fileURLToPath(new URL('../..', import.meta.url)).replace(/\/$/, '')

const LONGEST_SOCKET_PATH = 100

/** A path as it reads from the top of the checkout. */
export const shown = path => relative(process.cwd(), path) || '.'

/**
 * @typedef {{ data: string, log: string, run: string, mariadb: string, redis: string, mail: string, secrets: string, runFile: string, socket: string }} Layout
 */

/**
 * Places under one data directory, made when missing, readable by their owner alone. Throws LaunchError when they cannot be written.
 * @param {string} directory @returns {Layout}
 */
export function openLayout(directory) {
  const data = resolve(ROOT, directory)
  const layout = {
    data,
    log: join(data, 'log'),
    run: join(data, 'run'),
    mariadb: join(data, 'mariadb'),
    redis: join(data, 'redis'),
    mail: join(data, 'mail'),
    secrets: join(data, 'secrets.json'),
    runFile: join(data, 'run', 'launch.json'),
    socket: join(data, 'run', 'mariadb.sock'),
  }
  try {
    for (const path of [layout.data, layout.log, layout.run, layout.mariadb, layout.redis, layout.mail]) mkdirSync(path, { recursive: true, mode: 0o700 })
    writeFileSync(join(layout.run, 'writable'), '')
    if (layout.socket.length > LONGEST_SOCKET_PATH) layout.socket = shortSocket(data)
  }
  catch (error) {
    throw new LaunchError(`${shown(data)} cannot be written (${error.code}). It may belong to another user, root for instance: change its owner, or start as that user.`)
  }
  return layout
}

/** Sockets have a short limit on the length of their path. */
function shortSocket(data) {
  const directory = join(tmpdir(), `farpole-${userInfo().uid}-${createHash('sha256').update(data).digest('hex').slice(0, 12)}`)
  mkdirSync(directory, { recursive: true, mode: 0o700 })
  chmodSync(directory, 0o700)
  return join(directory, 'mariadb.sock')
}

/** A port from the environment or its default. Throws LaunchError for anything but 1 to 65535. */
export function portSetting(name, fallback) {
  const text = process.env[name]
  if (text === undefined || text === '') return fallback
  if (!/^\d{1,5}$/.test(text) || Number(text) < 1 || Number(text) > 65_535) throw new LaunchError(`${name} must be a port from 1 to 65535.`)
  return Number(text)
}
