import { existsSync } from 'node:fs'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import { ROOT } from './layout.mjs'
import { LaunchError, runMain } from './messages.mjs'
import { requireNode } from './programs.mjs'

/**
 * Command: runs one program of the build (web, worker or migrate) with the settings of the environment
 * and, where that leaves one open, of the file .env.
 */
await runMain(async () => {
  requireNode()
  const program = process.argv[2] ?? ''
  const built = join(ROOT, 'dist', `${program}.mjs`)
  if (!['web', 'worker', 'migrate'].includes(program)) throw new LaunchError('Name one of: web, worker, migrate.')
  if (!existsSync(built)) throw new LaunchError('Nothing is built yet. Build it first: npm run build')
  const file = join(ROOT, '.env')
  if (existsSync(file)) process.loadEnvFile(file)
  process.env.NODE_ENV ??= 'production'
  await import(pathToFileURL(built).href)
})
