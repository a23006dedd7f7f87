import { spawn } from 'node:child_process'
import { closeSync, existsSync, openSync, readFileSync, renameSync, statSync } from 'node:fs'
import { delimiter, join } from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import { LaunchError, say } from './messages.mjs'

const LOG_KEPT_BYTES = 8 * 1024 * 1024

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
export function logTail(path, lines = 15) {
  try {
    return readFileSync(path, 'utf8').trimEnd().split('\n').slice(-lines).map(line => `  ${line}`).join('\n')
  }
  catch {
    return '  (no log)'
  }
}

function openLog(path) {
  if (existsSync(path) && statSync(path).size > LOG_KEPT_BYTES) renameSync(path, `${path}.old`)
  return openSync(path, 'a', 0o600)
}

/**
 * Starts a long-running program in a process group of its own, so that Ctrl-C reaches it in our order alone;
 * it gets SIGTERM should this process vanish. Output goes to its log.
 */
export function startProcess({ name, command, args, env = process.env, cwd, log }) {
  const setpriv = findProgram('setpriv')
  const [program, ...rest] = setpriv ? [setpriv, '--pdeathsig', 'TERM', command, ...args] : [command, ...args]
  const output = openLog(log)
  const child = spawn(program, rest, { env, cwd, detached: true, stdio: ['ignore', output, output] })
  closeSync(output)
  const running = { name, pid: child.pid, log, ended: null, exited: null, stop: null, kill: null }
  running.exited = new Promise((done) => {
    const end = (code, signal) => {
      running.ended ??= { code, signal }
      done(running.ended)
    }
    child.once('error', error => end(error.code ?? 1, null))
    child.once('exit', end)
  })
  running.kill = signal => signalGroup(child.pid, signal)
  running.stop = async (withinMs = 20_000, signal = 'SIGTERM') => {
    if (running.ended) return
    child.kill(signal)
    const late = new AbortController()
    const done = await Promise.race([running.exited.then(() => true), sleep(withinMs, false, { signal: late.signal }).catch(() => false)])
    late.abort()
    if (!done) {
      say(`${name} did not end within ${Math.round(withinMs / 1000)} s and was killed.`)
      signalGroup(child.pid, 'SIGKILL')
      await running.exited
    }
  }
  return running
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

/** Runs a program to its end. With a log its output goes there, otherwise it comes back. Never throws for a non-zero code. */
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

/** How a process ended, in words. */
export function describeEnd({ code, signal }) {
  return signal ? `signal ${signal}` : `code ${code}`
}
