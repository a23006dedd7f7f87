import { existsSync } from 'node:fs'
import { join } from 'node:path'
import { ROOT } from './layout.mjs'
import { run } from './processes.mjs'

// Types for editors and checks. A production install leaves the build's packages out and needs none.
const nuxt = join(ROOT, 'node_modules', 'nuxt', 'bin', 'nuxt.mjs')
if (existsSync(nuxt)) {
  const { code } = await run(process.execPath, [nuxt, 'prepare'], { cwd: ROOT, show: true })
  process.exitCode = code
}
