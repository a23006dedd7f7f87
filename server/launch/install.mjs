import { createHash } from 'node:crypto'
import { existsSync, readFileSync, statSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { LaunchError, say, seconds } from './messages.mjs'
import { ROOT, shown } from './layout.mjs'
import { findProgram, logTail, run } from './processes.mjs'

const MODULES = join(ROOT, 'node_modules')
const LOCK = join(ROOT, 'package-lock.json')
const STAMP = join(MODULES, '.farpole-lock')

const lockHash = () => createHash('sha256').update(readFileSync(LOCK)).digest('hex')

/** Notes which lock file the installed packages came from. */
export function stampInstall() {
  writeFileSync(STAMP, lockHash())
}

function isInstalled() {
  if (!existsSync(join(MODULES, 'nuxt', 'package.json')) || !existsSync(join(MODULES, 'esbuild', 'package.json'))) return false
  if (existsSync(STAMP)) return readFileSync(STAMP, 'utf8') === lockHash()
  // Packages that npm installed without the stamp: npm's own record is written last.
  const record = join(MODULES, '.package-lock.json')
  return existsSync(record) && statSync(record).mtimeMs >= statSync(LOCK).mtimeMs
}

/** Installs the packages of the lock file when they are missing or of another lock. Throws LaunchError when npm fails. */
export async function requirePackages(layout) {
  if (isInstalled()) return
  const npm = process.env.npm_execpath
  const program = findProgram('npm')
  if (!npm && !program) throw new LaunchError('npm was not found; it comes with Node.js.')
  say('Installing the packages of package-lock.json (npm ci, about a minute) …')
  const began = performance.now()
  const log = join(layout.log, 'install.log')
  const args = ['ci', '--include=dev', '--no-audit', '--no-fund']
  const { code } = npm && /\.[cm]?js$/.test(npm)
    ? await run(process.execPath, [npm, ...args], { cwd: ROOT, log })
    : await run(program, args, { cwd: ROOT, log })
  if (code !== 0) throw new LaunchError(`npm ci failed. The last lines of ${shown(log)}:\n${logTail(log)}`)
  stampInstall()
  say(`  installed in ${seconds(began)}`)
}
