import { watch } from 'node:fs'
import { join } from 'node:path'
import { esbuildArguments, esbuildBinary } from './build.mjs'
import { ROOT } from './layout.mjs'
import { say } from './messages.mjs'
import { startProcess } from './processes.mjs'
import { startWeb, startWorker } from './stack.mjs'

const SETTLE_MS = 300

/** Starts the portal and the workers so that both follow the sources. */
export async function startDevelopment(stack, supervisor) {
  const env = { ...stack.env, NODE_ENV: 'development', NUXT_SESSION_PASSWORD: stack.secrets.session }
  const nuxt = [join(ROOT, 'node_modules/nuxt/bin/nuxt.mjs'), 'dev', '--no-fork', '--host', '127.0.0.1', '--port', String(stack.ports.web)]
  await supervisor.startTogether([() => startWeb(stack, { env, command: nuxt, withinMs: 180_000 })])
  supervisor.keep(startProcess({
    name: 'The bundler', command: esbuildBinary(), args: [...esbuildArguments(), '--watch=forever'], cwd: ROOT, env, log: join(stack.layout.log, 'build-workers.log'),
  }))
  let worker = null
  await supervisor.startRestarting(async () => (worker = await startWorker(stack, { env })), Infinity)
  followBundle(() => {
    if (supervisor.ending || worker.ended) return
    say('The workers\' sources changed; starting the worker anew.')
    worker.stop()
  })
}

/** Calls back some moments after the bundles changed, once for a whole rebuild. */
function followBundle(changed) {
  let timer = null
  watch(join(ROOT, 'dist'), (_, file) => {
    if (file !== 'worker.mjs' && file !== 'compute.mjs') return
    clearTimeout(timer)
    timer = setTimeout(changed, SETTLE_MS)
  }).unref()
}
