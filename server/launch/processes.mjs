import { spawn } from 'node:child_process'
import { closeSync, existsSync, openSync, readFileSync, renameSync, statSync } from 'node:fs'
import { delimiter, join } from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import { LaunchError, say } from './messages.mjs'

const LOG_KEPT_BYTES = 8 * 1024 * 1024
const LOG_LINE_SHOWN = 240

/** Full path of a program, or null. Looks where servers are installed too, which an ordinary user's PATH leaves out. */
export function findProgram(name) {
  const places = [...(process.env.PATH ?? '').split(delimiter), '/usr/local/sbin', '/usr/sbin', '/sbin']
  return places.filter(Boolean).map(place => join(place, name)).find(path => existsSync(path)) ?? null
}

/** What tells one process from a later one with the same id: its start in clock ticks since boot; null when there is no such process. */
export function processStart(pid) {
  try {
    const stat = readFileSync(`/proc/${pid}/stat`, 'utf8')
    const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ')
    return fields[0] === 'Z' ? null : Number(fields[19])
  }
  catch {
    return null
  }
}

/** The last lines of a log, for a message. */
export function logTail(path, lines = 12) {
  try {
    return readFileSync(path, 'utf8').trimEnd().split('\n').slice(-lines).map(line => `  ${line.slice(0, LOG_LINE_SHOWN)}`).join('\n')
  }
  catch {
    return '  (no log)'
  }
}

function openLog(path) {
  if (existsSync(path) && statSync(path).size > LOG_KEPT_BYTES) renameSync(path, `${path}.old`)
  return openSync(path, 'a', 0o600)
}

/** A long-running program that was started here. */
export class Running {
  /** How it ended; null while it runs. @type {{ code: number | string | null, signal: string | null } | null} */
  ended = null
  #child

  /** @param {string} name @param {string} log @param {import('node:child_process').ChildProcess} child */
  constructor(name, log, child) {
    this.name = name
    this.log = log
    this.pid = child.pid ?? 0
    this.#child = child
    /** Fulfilled with how it ended. */
    this.exited = new Promise((done) => {
      const end = (code, signal) => {
        this.ended ??= { code, signal }
        done(this.ended)
      }
      child.once('error', error => end(error.code ?? 1, null))
      child.once('exit', end)
    })
  }

  /** Sends a signal to the program alone. @param {NodeJS.Signals} signal */
  signal(signal) {
    this.#child.kill(signal)
  }

  /** Asks it to end and waits; kills it with all that it started when it takes too long. */
  async stop(withinMs = 20_000) {
    if (this.ended) return
    this.#child.kill('SIGTERM')
    const late = new AbortController()
    const done = await Promise.race([this.exited.then(() => true), sleep(withinMs, false, { signal: late.signal }).catch(() => true)])
    late.abort()
    if (!done) {
      say(`${this.name} did not end within ${Math.round(withinMs / 1000)} s and was killed.`)
      await this.kill()
    }
  }

  /** Kills it with all that it started, and waits. */
  async kill() {
    signalGroup(this.pid, 'SIGKILL')
    await this.exited
  }
}

/**
 * Starts a long-running program in a process group of its own, so that Ctrl-C reaches it in our order alone;
 * it gets SIGTERM should this process vanish. Output goes to its log.
 * @param {{ name: string, command: string | null, args: string[], env?: NodeJS.ProcessEnv, cwd?: string, log: string }} program
 */
export function startProcess({ name, command, args, env = process.env, cwd, log }) {
  if (!command) throw new LaunchError(`The program for ${name} is not on this machine.`)
  const setpriv = findProgram('setpriv')
  const [program, ...rest] = setpriv ? [setpriv, '--pdeathsig', 'TERM', command, ...args] : [command, ...args]
  const output = openLog(log)
  const child = spawn(program, rest, { env, cwd, detached: true, stdio: ['ignore', output, output] })
  closeSync(output)
  return new Running(name, log, child)
}

function signalGroup(pid, signal) {
  if (!pid) return
  try {
    process.kill(-pid, signal)
  }
  catch (error) {
    if (error.code !== 'ESRCH') throw error
  }
}

const runs = new Set()

/** Asks every program that `run` is waiting for to end. */
export function endRuns() {
  for (const child of runs) child.kill('SIGTERM')
}

/**
 * Runs a program to its end. With a log its output goes there, otherwise it comes back. Never throws for a non-zero code.
 * @param {string} command @param {string[]} args
 * @param {{ env?: NodeJS.ProcessEnv, cwd?: string, log?: string, input?: string, show?: boolean }} [options]
 * @returns {Promise<{ code: number, signal: NodeJS.Signals | null, stdout: string, stderr: string }>}
 */
export function run(command, args, { env = process.env, cwd, log, input, show = false } = {}) {
  return new Promise((done) => {
    const output = log ? openLog(log) : null
    const out = show ? 2 : output ?? 'pipe'
    const child = spawn(command, args, { env, cwd, stdio: [input === undefined ? 'ignore' : 'pipe', out, show ? 2 : output ?? 'pipe'] })
    if (output !== null) closeSync(output)
    runs.add(child)
    child.once('close', () => runs.delete(child))
    let stdout = ''
    let stderr = ''
    child.stdout?.setEncoding('utf8').on('data', (text) => { stdout += text })
    child.stderr?.setEncoding('utf8').on('data', (text) => { stderr += text })
    child.stdin?.on('error', () => {})
    child.stdin?.end(input)
    child.once('error', error => done({ code: 127, signal: null, stdout, stderr: `${stderr}${error.message}` }))
    child.once('close', (code, signal) => done({ code: code ?? 1, signal, stdout, stderr }))
  })
}

/**
 * Waits until `ready` answers true. Throws LaunchError with the end of the log
 * when the process ends first or the time runs out.
 * @param {Running} running @param {() => boolean | Promise<boolean>} ready @param {number} withinMs
 */
export async function waitUntil(running, ready, withinMs, everyMs = 150) {
  const deadline = performance.now() + withinMs
  while (performance.now() < deadline) {
    if (running.ended) throw new LaunchError(`${running.name} ended while it was starting (${describeEnd(running.ended)}). Its last lines:\n${logTail(running.log)}`)
    if (await ready()) return
    await sleep(everyMs)
  }
  throw new LaunchError(`${running.name} did not answer within ${Math.round(withinMs / 1000)} s. Its last lines:\n${logTail(running.log)}`)
}

/**
 * Calls back once when npm, which started this, is gone: npm passes signals to the shell between, and that need not pass them on.
 * @param {() => void} ended
 */
export function followParent(ended) {
  if (!process.env.npm_lifecycle_event) return
  const parent = process.ppid
  const timer = setInterval(() => {
    if (process.ppid === parent) return
    clearInterval(timer)
    ended()
  }, 500)
  timer.unref()
}

/** How a process ended, in words. */
export function describeEnd({ code, signal }) {
  return signal ? `signal ${signal}` : `code ${code}`
}
