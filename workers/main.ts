import os from 'node:os'
import { readSettings } from '#shared/schemas/settings'
import { newId } from '../server/models/id'
import { openLog } from './log'
import { startWorker } from './worker'

/** The solver worker: runs until it is asked to end. Any number of them share one database and one Redis. */
function main() {
  const settings = readSettings(process.env)
  const workerId = `${os.hostname().replace(/[^\w.-]/g, '').slice(0, 36)}-${newId()}`
  const log = openLog(settings.logLevel, workerId)
  const worker = startWorker(settings, workerId, log)
  for (const signal of ['SIGTERM', 'SIGINT'] as const) {
    process.on(signal, () => {
      log.info({ signal }, 'ending')
      worker.drain().then(() => process.exit(0), () => process.exit(1))
    })
  }
}

try {
  main()
}
catch (error) {
  console.error(error instanceof Error ? error.message : error)
  process.exitCode = 1
}
