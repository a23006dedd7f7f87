import { existsSync } from 'node:fs'
import { join } from 'node:path'
import { ROOT } from './layout.mjs'
import { run } from './processes.mjs'

// The kernels' bytes and the types for editors and checks. A production install leaves the build's packages out and needs none.
const nuxt = join(ROOT, 'node_modules', 'nuxt', 'bin', 'nuxt.mjs')
if (existsSync(nuxt)) {
  const kernels = await run(process.execPath, [join(ROOT, 'server', 'launch', 'kernels.mjs')], { cwd: ROOT, show: true })
  const { code } = kernels.code === 0 ? await run(process.execPath, [nuxt, 'prepare'], { cwd: ROOT, show: true }) : kernels
  process.exitCode = code
}
