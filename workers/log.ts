import pino from 'pino'
import type { Logger } from 'pino'
import { databaseErrorNumber } from '../server/models/transaction'

export type { Logger }

const QUIET_MS = 30_000

/** Opens the log of a worker process: one JSON object a line on standard output. */
export const openLog = (level: string, workerId: string): Logger =>
  pino({ level, base: { service: 'worker', worker: workerId }, timestamp: pino.stdTimeFunctions.isoTime })

/** What may be logged of an error: never its SQL or parameters, which hold users' data. */
export function errorFields(error: unknown): Record<string, unknown> {
  if (!(error instanceof Error)) return { error: typeof error }
  if (error.name.startsWith('Sequelize')) return { error: error.name, number: databaseErrorNumber(error) }
  return { error: error.name, message: error.message, stack: error.stack }
}

/** Reports each kind of trouble at most twice a minute, so that an outage is not a flood of lines. */
export function troubleReporter(log: Logger): (what: string) => (error: unknown) => void {
  const last = new Map<string, number>()
  return what => (error) => {
    const key = `${what} ${error instanceof Error ? error.name : ''}`
    const now = performance.now()
    if (now - (last.get(key) ?? -Infinity) < QUIET_MS) return
    last.set(key, now)
    log.warn(errorFields(error), what)
  }
}
