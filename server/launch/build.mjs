import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, readFileSync, readdirSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import { LaunchError, runMain, say, seconds } from './messages.mjs'
import { ROOT, openLayout, shown } from './layout.mjs'
import { requirePackages } from './install.mjs'
import { logTail, run } from './processes.mjs'
import { requireNode } from './programs.mjs'

/** Programs of the build beside the web server: file in dist, source. */
export const ENTRIES = {
  worker: 'workers/main.ts',
  compute: 'workers/compute.ts',
  solve: 'workers/solve.ts',
  migrate: 'server/migrations/run.ts',
  web: 'server/launch/web.ts',
  person: 'server/launch/person.ts',
  catcher: 'server/launch/catcher.ts',
}

const PARTS = {
  kernels: {
    what: 'the solver’s kernels',
    sources: ['shared/kernels/assembly', 'package-lock.json'],
    product: 'shared/kernels/generated.ts',
    stamp: 'node_modules/.cache/farpole-kernels/sources',
    build: log => run(process.execPath, [join(ROOT, 'server/launch/kernels.mjs')], { cwd: ROOT, log }),
  },
  web: {
    what: 'the portal (nuxt build, about a minute)',
    sources: ['app', 'server', 'shared', 'public', 'nuxt.config.ts', 'tailwind.config.ts', 'tailwind.config.js', 'package-lock.json'],
    product: '.output/server/index.mjs',
    stamp: '.output/farpole-sources',
    build: log => run(process.execPath, [join(ROOT, 'node_modules/nuxt/bin/nuxt.mjs'), 'build'], { cwd: ROOT, log, env: { ...process.env, NODE_ENV: 'production' } }),
  },
  workers: {
    what: 'the solver workers',
    sources: ['workers', 'server/models', 'server/queue', 'server/migrations', 'server/mail', 'server/launch/web.ts', 'server/launch/person.ts', 'server/launch/catcher.ts', 'server/launch/readMail.ts', 'shared', 'tsconfig.workers.json', 'package-lock.json'],
    product: 'dist/worker.mjs',
    stamp: 'dist/farpole-sources',
    build: log => run(esbuildBinary(), esbuildArguments(), { cwd: ROOT, log }),
  },
}

/** The bundler's program in node_modules. */
export const esbuildBinary = () => join(ROOT, 'node_modules/.bin/esbuild')

/** Arguments that bundle every entry to dist; packages stay in node_modules. */
export function esbuildArguments() {
  return [
    ...Object.entries(ENTRIES).map(([name, source]) => `${name}=${source}`),
    '--bundle', '--platform=node', '--format=esm', '--target=node20', '--packages=external', '--alias:#shared=./shared',
    '--tsconfig-raw={}', '--sourcemap', '--outdir=dist', '--out-extension:.js=.mjs', '--log-level=warning',
  ]
}

function* filesUnder(path) {
  const full = join(ROOT, path)
  if (!existsSync(full)) return
  const entries = readdirSync(full, { withFileTypes: true }).sort((a, b) => (a.name < b.name ? -1 : 1))
  for (const entry of entries) {
    if (entry.isDirectory()) yield* filesUnder(join(path, entry.name))
    else yield join(path, entry.name)
  }
}

function* sourceFiles(sources) {
  for (const source of sources) {
    if (!existsSync(join(ROOT, source))) continue
    if (/\.\w+$/.test(source)) yield source
    else yield* filesUnder(source)
  }
}

/** One hash of all sources: content and names, so that a checkout's dates do not matter. */
function sourcesHash(sources) {
  const hash = createHash('sha256').update(process.versions.node.split('.')[0])
  for (const file of sourceFiles(sources)) {
    if (file.startsWith('server/launch/') && file.endsWith('.mjs')) continue
    hash.update(`\0${file}\0`).update(readFileSync(join(ROOT, file)))
  }
  return hash.digest('hex')
}

/**
 * Builds a part when its sources differ from what was built last. The stamp is written last:
 * a build cut short is done again. Throws LaunchError with the end of the build's log.
 * @param {import('./layout.mjs').Layout} layout @param {('web' | 'workers')[]} [names] after the kernels, which both need @param {{ force?: boolean }} [options]
 */
export async function requireBuild(layout, names = ['web', 'workers'], { force = false } = {}) {
  for (const name of ['kernels', ...names]) {
    const part = PARTS[name]
    const stamp = join(ROOT, part.stamp)
    const hash = sourcesHash(part.sources)
    if (!force && existsSync(join(ROOT, part.product)) && existsSync(stamp) && readFileSync(stamp, 'utf8') === hash) continue
    rmSync(stamp, { force: true })
    say(`Building ${part.what} …`)
    const began = performance.now()
    const log = join(layout.log, `build-${name}.log`)
    rmSync(log, { force: true })
    const { code } = await part.build(log)
    if (code !== 0) throw new LaunchError(`The build failed. The last lines of ${shown(log)}:\n${logTail(log, 30)}`)
    mkdirSync(join(stamp, '..'), { recursive: true })
    writeFileSync(stamp, hash)
    say(`  built in ${seconds(began)}`)
  }
}

if (process.argv[1] && import.meta.url === pathToFileURL(process.argv[1]).href) {
  await runMain(async () => {
    requireNode()
    const layout = openLayout(process.env.FARPOLE_DATA_DIR ?? '.data')
    await requirePackages(layout)
    await requireBuild(layout, ['web', 'workers'], { force: true })
  })
}
