import { randomBytes } from 'node:crypto'
import { chmodSync, readFileSync, renameSync, writeFileSync } from 'node:fs'
import { LaunchError } from './messages.mjs'
import { shown } from './layout.mjs'

const NAMES = ['database', 'schema', 'redis', 'session']

/** The generated passwords of one data directory; made at the first start, file mode 0600. @param {import('./layout.mjs').Layout} layout @returns {Record<string, string>} */
export function openSecrets(layout) {
  let secrets = {}
  try {
    secrets = JSON.parse(readFileSync(layout.secrets, 'utf8'))
  }
  catch (error) {
    if (error.code !== 'ENOENT') throw new LaunchError(`${shown(layout.secrets)} cannot be read (${error.message}). Remove it to have new passwords made; people must then sign in again.`)
  }
  const missing = NAMES.filter(name => typeof secrets[name] !== 'string')
  if (missing.length > 0) {
    for (const name of missing) secrets[name] = randomBytes(32).toString('hex')
    writeFileSync(`${layout.secrets}.new`, `${JSON.stringify(secrets, null, 2)}\n`, { mode: 0o600 })
    renameSync(`${layout.secrets}.new`, layout.secrets)
  }
  chmodSync(layout.secrets, 0o600)
  return secrets
}
