import { chmodSync, lstatSync, readFileSync, readdirSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import { LaunchError, say } from './messages.mjs'
import { findProgram, run } from './processes.mjs'

const POLICY = '/usr/sbin/policy-rc.d'
const POLICY_SAVED = '/usr/sbin/policy-rc.d.before-farpole'
const POLICY_MARK = '# Written by the Farpole launcher while it installs packages; removed again at once.'

const SERVERS = [
  { program: 'mariadbd', package: 'mariadb-server', name: 'MariaDB' },
  { program: 'redis-server', package: 'redis-server', name: 'Redis' },
]
const BROWSER = { program: 'chromium', package: 'chromium', name: 'Chromium' }

/** Checks the version of Node.js that runs this. Throws LaunchError for one that is too old. */
export function requireNode() {
  const [major, minor] = process.versions.node.split('.').map(Number)
  if (major > 21 || (major === 20 && minor >= 19)) return
  throw new LaunchError(`Farpole needs Node.js 20.19 or a later 20, or 22 and later; this is ${process.versions.node}.`)
}

/**
 * Makes sure that the servers (and the browser, for tests) are on the machine, and installs what is missing
 * from Debian's packages. Throws LaunchError with the command to give when that is not possible here.
 */
export async function requirePrograms({ browser = false } = {}) {
  const isRoot = process.getuid?.() === 0
  if (isRoot) restorePolicy()
  const missing = [...SERVERS, ...(browser ? [BROWSER] : [])].filter(({ program }) => !findProgram(program))
  if (missing.length === 0) return
  const packages = missing.map(entry => entry.package)
  const names = missing.map(entry => entry.name).join(', ')
  const apt = findProgram('apt-get')
  if (!apt) throw new LaunchError(`Missing: ${names}. They install by themselves on Debian 12 only; install ${packages.join(', ')} in this system's own way and start again.`)
  if (!isRoot) {
    throw new LaunchError([
      `Missing: ${names}. Installing needs root. Give this command, then start again:`,
      '',
      `  sudo apt-get update && sudo apt-get install --yes --no-install-recommends ${packages.join(' ')}`,
      '',
      'Farpole starts its own private MariaDB and Redis and uses none of the services that Debian may start with the packages.',
    ].join('\n'))
  }
  await install(apt, packages, names)
  const still = missing.filter(({ program }) => !findProgram(program))
  if (still.length > 0) throw new LaunchError(`apt-get ended well, but these are still missing: ${still.map(({ program }) => program).join(', ')}.`)
}

async function install(apt, packages, names) {
  say(`Installing ${names} from Debian's packages (${packages.join(', ')}); services of their own are kept from starting.`)
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive', LC_ALL: 'C.UTF-8' }
  const quiet = ['-qq', '-o', 'Dpkg::Use-Pty=0', '-o', 'DPkg::Lock::Timeout=120']
  const installNow = () => run(apt, [...quiet, 'install', '--yes', '--no-install-recommends', ...packages], { env })
  // Ctrl-C must not leave the policy behind: let apt-get end first, then restore.
  const hold = () => {}
  process.on('SIGINT', hold).on('SIGTERM', hold)
  holdServices()
  try {
    let result = hasPackageLists() ? await installNow() : null
    // Lists that are missing or out of date name packages that the archive no longer has.
    if (!result || (result.code !== 0 && result.signal === null)) {
      const update = await run(apt, [...quiet, 'update'], { env })
      if (update.code !== 0) say(`apt-get update failed: ${lastLines(update.stderr)}`)
      result = await installNow()
    }
    if (result.code !== 0) {
      throw new LaunchError(`apt-get could not install ${packages.join(', ')}:\n${lastLines(result.stderr)}\nTo try by hand: apt-get update && apt-get install --yes --no-install-recommends ${packages.join(' ')}`)
    }
  }
  finally {
    restorePolicy()
    process.off('SIGINT', hold).off('SIGTERM', hold)
  }
}

function hasPackageLists() {
  try {
    return readdirSync('/var/lib/apt/lists').some(name => name.endsWith('_Packages') || name.includes('_Packages.'))
  }
  catch {
    return false
  }
}

const lastLines = text => text.trim().split('\n').slice(-6).map(line => `  ${line}`).join('\n')

const exists = (path) => {
  try {
    lstatSync(path)
    return true
  }
  catch {
    return false
  }
}

/** Debian asks this file before a package starts its service; 101 means no. */
function holdServices() {
  if (exists(POLICY)) renameSync(POLICY, POLICY_SAVED)
  writeFileSync(POLICY, `#!/bin/sh\n${POLICY_MARK}\nexit 101\n`)
  chmodSync(POLICY, 0o755)
}

/** Puts the policy back to exactly what it was, after this run or after one that was cut short. */
function restorePolicy() {
  const ours = exists(POLICY) && lstatSync(POLICY).isFile() && readFileSync(POLICY, 'utf8').includes(POLICY_MARK)
  if (ours) rmSync(POLICY)
  if (exists(POLICY_SAVED)) {
    if (exists(POLICY)) rmSync(POLICY_SAVED)
    else renameSync(POLICY_SAVED, POLICY)
  }
}
