import { existsSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { readSettings } from '#shared/schemas/settings'

/** Longest wait for open requests when the web server is asked to end, ms. */
const SHUTDOWN_MS = 8000

/** Command: checks the settings, hands them to the built server under the names it knows, and starts it. */
async function main() {
  const settings = readSettings(process.env)
  const built = new URL('../.output/server/index.mjs', import.meta.url)
  if (!existsSync(fileURLToPath(built))) throw new Error('The portal is not built yet. Build it first: npm run build')
  process.env.NODE_ENV = 'production'
  process.env.NITRO_HOST = settings.web.host
  process.env.NITRO_PORT = String(settings.web.port)
  process.env.NITRO_SHUTDOWN_TIMEOUT = String(SHUTDOWN_MS)
  process.env.NUXT_SESSION_PASSWORD = settings.sessionSecret
  await import(built.href)
}

main().catch((error: unknown) => {
  console.error(error instanceof Error ? error.message : error)
  process.exit(1)
})
