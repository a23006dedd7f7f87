import pino from 'pino'
import type { Logger } from 'pino'

let logger: Logger | undefined

/** Opens the process's log; called once at start. */
export function openLog(level: string): Logger {
  logger = pino({ level, base: { service: 'web' }, redact: ['password', 'headers.cookie', 'headers.authorization'], timestamp: pino.stdTimeFunctions.isoTime })
  return logger
}

/** The process's log. */
export const useLog = (): Logger => logger ?? openLog('info')

/** What may be logged of an error: never its SQL or parameters, which hold users' data. */
export function errorFields(error: unknown): Record<string, unknown> {
  if (!(error instanceof Error)) return { error: typeof error }
  const code = 'original' in error && error.original instanceof Error && 'code' in error.original ? error.original.code : undefined
  const isDatabase = error.name.startsWith('Sequelize')
  return { error: error.name, code, message: isDatabase ? undefined : error.message, stack: isDatabase ? undefined : error.stack }
}
