import { existsSync } from 'node:fs'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import { ROOT } from './layout.mjs'
import { LaunchError, runMain } from './messages.mjs'
import { followParent } from './processes.mjs'
import { requireNode } from './programs.mjs'

const PROGRAMS = ['web', 'worker', 'migrate', 'person']

/**
 * Command: runs one program of the build (web, worker, migrate or person) with the settings of the environment
 * and, where that leaves one open, of the file .env.
 */
await runMain(async () => {
  requireNode()
  const program = process.argv[2] ?? ''
  const built = join(ROOT, 'dist', `${program}.mjs`)
  if (!PROGRAMS.includes(program)) throw new LaunchError(`Name one of: ${PROGRAMS.join(', ')}.`)
  if (!existsSync(built)) throw new LaunchError('Nothing is built yet. Build it first: npm run build')
  const file = join(ROOT, '.env')
  if (existsSync(file)) process.loadEnvFile(file)
  process.env.NODE_ENV ??= 'production'
  followParent(() => process.kill(process.pid, 'SIGTERM'))
  // The program reads its own arguments, from the third on.
  process.argv.splice(1, 2, built)
  await import(pathToFileURL(built).href)
})
