import { LaunchError, say } from './messages.mjs'
import { describeEnd, endRuns, followParent, logTail } from './processes.mjs'

const RESTARTS_ALLOWED = 5
const RESTART_WINDOW_MS = 60_000

/**
 * Holds the processes of one start: ends them in reverse order, once, on a signal, on a fault,
 * or when one that the others need has ended.
 */
export class Supervisor {
  #claimed
  #running = []
  #stopping = null
  #signalEnd
  #whenEnding
  #restarts = []
  ending = false
  fault = null

  constructor(claimed) {
    this.#claimed = claimed
    this.#whenEnding = new Promise((done) => { this.#signalEnd = done })
    for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) process.on(signal, () => this.end())
    process.stdout.on('error', () => {})
    process.stderr.on('error', () => {})
    followParent(() => this.end())
  }

  /** Begins to end everything; a fault is what the user should read. */
  end(fault = null) {
    if (this.ending) return
    this.ending = true
    this.fault = fault
    endRuns()
    this.#signalEnd()
  }

  /** Throws LaunchError once the end has begun. */
  throwIfEnding() {
    if (this.ending) throw new LaunchError('Stopped before it was ready.')
  }

  /** Waits for the end to begin; throws the fault, if one began it. */
  async ended() {
    await this.#whenEnding
    if (this.fault) throw this.fault
  }

  /** Keeps a process: its unexpected end ends the rest. */
  keep(running, { onExit } = {}) {
    this.#running.push(running)
    this.#claimed.add(running)
    if (this.#stopping) running.stop()
    running.exited.then((how) => {
      if (this.ending || this.#stopping) return
      if (onExit) onExit(how)
      else this.end(new LaunchError(`${running.name} ended by itself (${describeEnd(how)}), so everything is stopped. Its last lines:\n${logTail(running.log)}`))
    })
    return running
  }

  /** Starts several at once and keeps them. When one fails, those that did start are still ended. */
  async startTogether(starts) {
    this.throwIfEnding()
    const results = await Promise.allSettled(starts.map(start => start()))
    const running = results.filter(result => result.status === 'fulfilled').map(result => this.keep(result.value))
    const failed = results.find(result => result.status === 'rejected')
    if (failed) throw failed.reason
    this.throwIfEnding()
    return running
  }

  /** Starts a process that is started again when it ends by itself, a few times a minute at most. */
  async startRestarting(start, allowed = RESTARTS_ALLOWED) {
    this.throwIfEnding()
    const running = await start()
    this.keep(running, { onExit: how => this.#restart(start, allowed, running, how) })
    this.throwIfEnding()
  }

  async #restart(start, allowed, running, how) {
    const now = performance.now()
    this.#restarts = [...this.#restarts.filter(time => now - time < RESTART_WINDOW_MS), now]
    if (this.#restarts.length > allowed) {
      this.end(new LaunchError(`${running.name} keeps ending (${describeEnd(how)}), so everything is stopped. Its last lines:\n${logTail(running.log)}`))
      return
    }
    if (how.code !== 0) say(`${running.name} ended by itself (${describeEnd(how)}); starting it again.`)
    this.#running = this.#running.filter(other => other !== running)
    try {
      await this.startRestarting(start, allowed)
    }
    catch (error) {
      this.end(error)
    }
  }

  /** Ends everything in reverse order of starting and waits for it. */
  stopAll() {
    this.ending = true
    this.#stopping ??= this.#stopInOrder()
    return this.#stopping
  }

  async #stopInOrder() {
    if (this.#running.some(running => !running.ended)) say('\nEnding: workers, web server, mail, Redis, MariaDB …')
    while (this.#running.length > 0) await this.#running.pop().stop(30_000)
  }
}
