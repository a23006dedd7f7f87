import { spawn } from 'node:child_process'
import { existsSync, mkdirSync, readFileSync, readdirSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import { requireBuild } from './build.mjs'
import { requirePackages } from './install.mjs'
import { ROOT, openLayout } from './layout.mjs'
import { LaunchError, runMain, say, seconds } from './messages.mjs'
import { endRuns } from './processes.mjs'
import { requireNode, requirePrograms } from './programs.mjs'
import { sweep } from './runFile.mjs'

/** Longest time that one stage may take before it is ended and counted as failed, ms. */
const STAGE_MS = 20 * 60_000
const DATA = join(ROOT, '.data', 'test')
const bin = name => join(ROOT, 'node_modules/.bin', name)

/** Two lanes of checks that take about as long, side by side; within a lane one after the other. */
const CHECKS = [
  [{ name: 'types of portal and server', command: bin('nuxt'), args: ['typecheck'] }],
  [
    { name: 'lint', command: bin('eslint'), args: ['.'] },
    { name: 'types of workers', command: bin('tsc'), args: ['--noEmit', '-p', 'tsconfig.workers.json'] },
    { name: 'types of tests', command: bin('tsc'), args: ['--noEmit', '-p', 'tsconfig.tests.json'] },
  ],
]
const PROJECTS = ['unit', 'reference', 'integration', 'faults', 'e2e']

const total = { passed: 0, failed: 0 }
/** Stages that run. */
const current = new Set()
let stopped = false

function signalStage(child, signal) {
  try {
    if (child.pid !== undefined) process.kill(-child.pid, signal)
  }
  catch (error) {
    if (error.code !== 'ESRCH') throw error
  }
}

function signalCurrent(signal) {
  for (const child of current) signalStage(child, signal)
}

/** Runs one stage to its end, its output shown. Answers whether it ended well. */
async function stage(name, command, args) {
  say(`\n── ${name}`)
  const began = performance.now()
  const child = spawn(command, args, { cwd: ROOT, detached: true, stdio: ['ignore', 2, 2], env: { ...process.env, CI: 'true', NUXT_TELEMETRY_DISABLED: '1' } })
  current.add(child)
  const timer = new AbortController()
  const code = await Promise.race([
    new Promise((done) => { child.once('close', done).once('error', () => done(127)) }),
    sleep(STAGE_MS, 'late', { signal: timer.signal }).catch(() => 'late'),
  ])
  timer.abort()
  if (code === 'late') say(`${name} was still running after ${STAGE_MS / 60_000} minutes and was ended.`)
  signalStage(child, 'SIGKILL')
  current.delete(child)
  say(`── ${name}: ${code === 0 ? 'passed' : 'failed'} (${seconds(began)})`)
  return code === 0
}

/** Counts a test project's results; a file that could not run counts as one failure. */
function count(report, endedWell) {
  let results
  try {
    results = JSON.parse(readFileSync(report, 'utf8'))
  }
  catch {
    total.failed += 1
    return
  }
  let failed = results.numFailedTests
  for (const file of results.testResults) {
    const failures = file.assertionResults.filter(result => result.status === 'failed').length
    if (file.status === 'failed' && failures === 0) failed += 1
  }
  if (results.numPassedTests + failed === 0 || (!endedWell && failed === 0)) failed += 1
  total.passed += results.numPassedTests
  total.failed += failed
}

/** Ends what a test that was cut short left running. */
async function sweepAll() {
  if (!existsSync(DATA)) return
  for (const entry of readdirSync(DATA, { withFileTypes: true })) {
    if (entry.isDirectory() && existsSync(join(DATA, entry.name, 'run'))) await sweep(openLayout(join(DATA, entry.name)))
  }
}

function prepare() {
  for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) {
    process.on(signal, () => {
      stopped = true
      endRuns()
      signalCurrent('SIGTERM')
    })
  }
}

async function main() {
  requireNode()
  const only = process.argv.slice(2)
  const unknown = only.filter(name => !PROJECTS.includes(name) && name !== 'checks')
  if (unknown.length > 0) throw new LaunchError(`Name none or some of: checks, ${PROJECTS.join(', ')}.`)
  const wanted = name => only.length === 0 || only.includes(name)
  const layout = openLayout('.data')
  await requirePrograms({ browser: true })
  prepare()
  await sweepAll()
  await requirePackages(layout)
  await requireBuild(layout)
  await Promise.all((wanted('checks') ? CHECKS : []).map(async (lane) => {
    for (const { name, command, args } of lane) {
      if (stopped) return
      if (await stage(name, command, args)) total.passed += 1
      else total.failed += 1
    }
  }))
  mkdirSync(DATA, { recursive: true })
  for (const project of PROJECTS.filter(wanted)) {
    if (stopped) return
    const report = join(DATA, `${project}.json`)
    rmSync(report, { force: true })
    const well = await stage(project, bin('vitest'), ['run', '--project', project, '--reporter=default', '--reporter=json', `--outputFile.json=${report}`])
    count(report, well)
    await sweepAll()
  }
}

let finished = false
await runMain(async () => {
  const began = performance.now()
  try {
    await main()
    finished = !stopped
  }
  finally {
    signalCurrent('SIGKILL')
    await sweepAll()
    say(`\nAll of it took ${seconds(began)}.`)
  }
})
if (!finished) total.failed += 1
process.stdout.write(`tests: ${total.passed} passed, ${total.failed} failed\n`)
process.exitCode = total.failed === 0 ? 0 : 1
