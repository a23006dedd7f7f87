import { availableParallelism, cpus } from 'node:os'
import { existsSync, readdirSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import { esbuildBinary, requireBuild } from './build.mjs'
import { requirePackages } from './install.mjs'
import { ROOT, openLayout, shown } from './layout.mjs'
import { LaunchError, runMain, say } from './messages.mjs'
import { run } from './processes.mjs'
import { requireNode } from './programs.mjs'

const SOURCES = join(ROOT, 'tests/measure')
const BUNDLES = join(ROOT, 'dist/measure')

/**
 * Command: runs every file of tests/measure (or those named) one after the other, shows a table and keeps it.
 * A file exports `name` and `measure()`, which answers a list of { metric, value, unit }.
 */
await runMain(async () => {
  requireNode()
  const layout = openLayout(process.env.FARPOLE_DATA_DIR || '.data')
  await requirePackages(layout)
  await requireBuild(layout, ['workers'])
  const only = process.argv.slice(2)
  const files = existsSync(SOURCES) ? readdirSync(SOURCES).filter(file => file.endsWith('.ts') && (only.length === 0 || only.includes(file.slice(0, -3)))) : []
  if (files.length === 0) throw new LaunchError(`Nothing to measure in ${shown(SOURCES)}.`)
  rmSync(BUNDLES, { recursive: true, force: true })
  const built = await run(esbuildBinary(), [
    ...files.map(file => join(SOURCES, file)), '--bundle', '--platform=node', '--format=esm', '--target=node20', '--packages=external',
    '--alias:#shared=./shared', '--tsconfig-raw={}', `--outdir=${BUNDLES}`, '--out-extension:.js=.mjs', '--log-level=warning',
  ], { cwd: ROOT })
  if (built.code !== 0) throw new LaunchError(`The measures could not be built:\n${built.stderr}`)
  const rows = []
  for (const file of files) {
    const { name, measure } = await import(pathToFileURL(join(BUNDLES, file.replace(/\.ts$/, '.mjs'))).href)
    say(`Measuring ${name} …`)
    for (const row of await measure()) rows.push({ name, ...row })
  }
  show(rows)
  const result = { at: new Date().toISOString(), node: process.versions.node, processor: cpus()[0]?.model ?? '', cores: availableParallelism(), rows }
  const place = join(layout.data, 'measure.json')
  writeFileSync(place, `${JSON.stringify(result, null, 2)}\n`)
  say(`\nKept in ${shown(place)}.`)
})

function show(rows) {
  const lines = rows.map(({ name, metric, value, unit }) => ({ name, cells: [metric, format(value), unit] }))
  const widths = [0, 1].map(column => Math.max(...lines.map(line => line.cells[column].length)))
  let heading = ''
  for (const { name, cells: [metric, value, unit] } of lines) {
    if (name !== heading) process.stdout.write(`\n${name}\n`)
    heading = name
    process.stdout.write(`  ${metric.padEnd(widths[0])}  ${value.padStart(widths[1])}  ${unit}\n`)
  }
}

function format(value) {
  return Math.abs(value) >= 1e5 || (value !== 0 && Math.abs(value) < 1e-3) ? value.toExponential(3) : String(Number(value.toPrecision(4)))
}
