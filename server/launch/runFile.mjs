import { closeSync, openSync, readFileSync, renameSync, rmSync, writeFileSync, writeSync } from 'node:fs'
import { setTimeout as sleep } from 'node:timers/promises'
import { LaunchError, say } from './messages.mjs'
import { processStart } from './processes.mjs'

/**
 * Claims a data directory for this process. The file names the owner and the processes it started,
 * so that a second start is refused and the remains of a killed one are ended.
 * Throws LaunchError when the owner is alive.
 * @param {import('./layout.mjs').Layout} layout @param {string} [address]
 */
export async function claim(layout, address) {
  const own = { pid: process.pid, start: processStart(process.pid), address, children: [] }
  for (;;) {
    try {
      const file = openSync(layout.runFile, 'wx', 0o600)
      writeSync(file, JSON.stringify(own))
      closeSync(file)
      return claimed(layout, own)
    }
    catch (error) {
      if (error.code !== 'EEXIST') throw error
      await settleEarlier(layout)
    }
  }
}

function claimed(layout, own) {
  const write = () => {
    writeFileSync(`${layout.runFile}.new`, JSON.stringify(own), { mode: 0o600 })
    renameSync(`${layout.runFile}.new`, layout.runFile)
  }
  return {
    add(running) {
      own.children = own.children.filter(child => processStart(child.pid) === child.start)
      own.children.push({ name: running.name, pid: running.pid, start: processStart(running.pid) })
      write()
    },
    release() {
      if (readRunFile(layout)?.pid === process.pid) rmSync(layout.runFile, { force: true })
    },
  }
}

function readRunFile(layout) {
  try {
    return JSON.parse(readFileSync(layout.runFile, 'utf8'))
  }
  catch {
    return null
  }
}

/** Refuses beside a living owner; otherwise ends what a dead one left running. */
async function settleEarlier(layout) {
  const earlier = readRunFile(layout)
  if (earlier && earlier.start !== null && processStart(earlier.pid) === earlier.start) {
    throw new LaunchError(`Farpole is already running here${earlier.address ? ` at ${earlier.address}` : ''} (process ${earlier.pid}). End it with Ctrl-C in its terminal or with: kill ${earlier.pid}`)
  }
  await endLeftovers(earlier?.children ?? [])
  rmSync(layout.runFile, { force: true })
}

async function endLeftovers(children) {
  const alive = () => children.filter(child => child.start !== null && processStart(child.pid) === child.start)
  if (alive().length === 0) return
  say(`An earlier start was cut short; ending what it left running: ${alive().map(child => `${child.name} (process ${child.pid})`).join(', ')}.`)
  for (const [signal, withinMs] of [['SIGTERM', 20_000], ['SIGKILL', 5_000]]) {
    for (const child of alive()) process.kill(child.pid, signal)
    for (const deadline = performance.now() + withinMs; alive().length > 0 && performance.now() < deadline;) await sleep(100)
  }
}

/** Ends whatever a dead owner of this data directory left running. Leaves a living owner alone. @param {import('./layout.mjs').Layout} layout */
export async function sweep(layout) {
  const earlier = readRunFile(layout)
  if (!earlier || (earlier.pid !== process.pid && processStart(earlier.pid) === earlier.start)) return
  await endLeftovers(earlier.children)
  rmSync(layout.runFile, { force: true })
}
