import { ConnectionAcquireTimeoutError, ConnectionError } from 'sequelize'
import { databaseErrorNumber } from '../server/models/transaction'

const LONGEST_WAIT_MS = 2000
/** Numbers from here on come from the driver: the connection was refused, cut or never had. */
const DRIVER_ERRORS = 45_000
/** Too many connections; the server shuts down; query or connection ended by an administrator; deadlock; lock wait; connection lost. */
const PASSING_ERRORS = new Set([1040, 1053, 1317, 1927, 1213, 1205, 2006, 2013])

/** Whether an error says that the database is away or busy, so that the same will work later. */
export function isPassing(error: unknown): boolean {
  if (error instanceof ConnectionError || error instanceof ConnectionAcquireTimeoutError) return true
  const number = databaseErrorNumber(error)
  return number !== undefined && (number >= DRIVER_ERRORS || PASSING_ERRORS.has(number))
}

/** Runs `work`, again for as long as the database is away, until `stop` says to give up. Other errors are thrown. */
export async function patiently<T>(work: () => Promise<T>, stop: AbortSignal): Promise<T> {
  for (let tries = 1; ; tries++) {
    try {
      return await work()
    }
    catch (error) {
      if (stop.aborted || !isPassing(error)) throw error
      await new Pause().wait(Math.min(LONGEST_WAIT_MS, 100 * 2 ** tries), stop)
    }
  }
}

/** A wait that can be cut short. */
export class Pause {
  private finish: (() => void) | null = null

  /** Resolves after the time, on `end` or on `stop`. */
  wait(milliseconds: number, stop: AbortSignal): Promise<void> {
    return new Promise((resolve) => {
      if (stop.aborted) return resolve()
      const finish = () => {
        clearTimeout(timer)
        stop.removeEventListener('abort', finish)
        this.finish = null
        resolve()
      }
      const timer = setTimeout(finish, milliseconds)
      stop.addEventListener('abort', finish)
      this.finish = finish
    })
  }

  end(): void {
    this.finish?.()
  }
}
