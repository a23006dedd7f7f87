import { existsSync, renameSync, rmSync } from 'node:fs'
import { userInfo } from 'node:os'
import { join } from 'node:path'
import { LaunchError, say } from './messages.mjs'
import { shown } from './layout.mjs'
import { findProgram, logTail, run, startProcess, waitUntil } from './processes.mjs'

const DATABASE = 'farpole'
/** The application reads and writes rows; only the migrations change tables, as a user of their own. */
export const USERS = {
  application: { name: 'farpole', rights: 'SELECT, INSERT, UPDATE, DELETE' },
  schema: { name: 'farpole_schema', rights: 'SELECT, INSERT, UPDATE, DELETE, CREATE, ALTER, DROP, INDEX, REFERENCES' },
}

/** Starts MariaDB on loopback with its data in the layout, initialised at the first start, and its users and passwords set. */
export async function startMariadb(layout, port, secrets, { bufferPool = '256M' } = {}) {
  const data = await requireData(layout)
  const running = startProcess({
    name: 'MariaDB',
    command: findProgram('mariadbd'),
    args: [
      '--no-defaults', `--user=${userInfo().username}`, `--datadir=${data}`, `--socket=${layout.socket}`, `--pid-file=${join(layout.run, 'mariadb.pid')}`,
      '--bind-address=127.0.0.1', `--port=${port}`, '--skip-name-resolve', '--local-infile=0', '--max-allowed-packet=64M', '--max-connections=300',
      '--innodb-log-file-size=32M', `--innodb-buffer-pool-size=${bufferPool}`, '--character-set-server=utf8mb4', '--collation-server=utf8mb4_unicode_ci',
    ],
    log: join(layout.log, 'mariadb.log'),
  })
  try {
    await waitUntil(running, async () => (await query(layout, 'SELECT 1')).code === 0, 60_000, 200)
    const grants = await query(layout, grantStatements(secrets))
    if (grants.code !== 0) throw new LaunchError(`MariaDB refused the application's user: ${grants.stderr.trim()}`)
  }
  catch (error) {
    await running.stop()
    throw error
  }
  return running
}

/** Makes the data directory beside its final place, so that an initialisation cut short is never mistaken for data. */
async function requireData(layout) {
  const data = join(layout.mariadb, 'data')
  const partial = join(layout.mariadb, 'partial')
  if (existsSync(partial)) {
    say('An earlier first start was cut short while MariaDB was being initialised; starting that over.')
    rmSync(partial, { recursive: true })
  }
  if (existsSync(data)) return data
  say('Initialising MariaDB …')
  const user = userInfo().username
  const log = join(layout.log, 'mariadb-init.log')
  const { code } = await run(findProgram('mariadb-install-db') ?? 'mariadb-install-db', [
    '--no-defaults', `--user=${user}`, `--datadir=${partial}`, '--auth-root-authentication-method=socket', `--auth-root-socket-user=${user}`,
    '--skip-test-db', '--skip-name-resolve',
  ], { log })
  if (code !== 0) throw new LaunchError(`MariaDB could not be initialised. The last lines of ${shown(log)}:\n${logTail(log)}`)
  renameSync(partial, data)
  return data
}

function grantStatements(secrets) {
  const passwords = { application: secrets.database, schema: secrets.schema }
  const lines = [`CREATE DATABASE IF NOT EXISTS ${DATABASE} CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;`]
  for (const [role, { name, rights }] of Object.entries(USERS)) {
    for (const host of ['127.0.0.1', 'localhost']) {
      lines.push(`CREATE USER IF NOT EXISTS '${name}'@'${host}';`)
      lines.push(`ALTER USER '${name}'@'${host}' IDENTIFIED BY '${passwords[role]}';`)
      lines.push(`GRANT ${rights} ON ${DATABASE}.* TO '${name}'@'${host}';`)
    }
  }
  return lines.join('\n')
}

/**
 * Runs statements as the server's administrator over its socket: no password exists, the system user is the proof.
 * @param {import('./layout.mjs').Layout} layout @param {string} sql
 */
export function query(layout, sql) {
  return run(findProgram('mariadb') ?? 'mariadb', ['--no-defaults', `--socket=${layout.socket}`, `--user=${userInfo().username}`, '--batch', '--skip-column-names'], { input: sql })
}
