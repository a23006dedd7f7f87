import { join } from 'node:path'
import { spawn } from 'node:child_process'
import { requireBuild } from './build.mjs'
import { requirePackages } from './install.mjs'
import { ROOT, openLayout } from './layout.mjs'
import { runMain } from './messages.mjs'
import { requireNode } from './programs.mjs'

/** Command: answers one job without portal, database or queue. Only the answer goes to stdout. */
await runMain(async () => {
  requireNode()
  const layout = openLayout(process.env.FARPOLE_DATA_DIR || '.data')
  await requirePackages(layout)
  await requireBuild(layout, ['workers'])
  const child = spawn(process.execPath, [join(ROOT, 'dist/solve.mjs'), ...process.argv.slice(2)], { stdio: 'inherit', cwd: process.env.INIT_CWD ?? process.cwd() })
  for (const signal of ['SIGINT', 'SIGTERM']) process.on(signal, () => child.kill(signal))
  process.exitCode = await new Promise(done => child.once('close', (code, signal) => done(signal ? 1 : code)))
})
