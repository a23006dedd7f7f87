import { appendFileSync } from 'node:fs'
import { join } from 'node:path'
import { requireBuild } from './build.mjs'
import { startDevelopment } from './develop.mjs'
import { requirePackages } from './install.mjs'
import { openLayout, portSetting, shown } from './layout.mjs'
import { LaunchError, runMain, say, seconds } from './messages.mjs'
import { requirePorts } from './ports.mjs'
import { requireNode, requirePrograms } from './programs.mjs'
import { claim } from './runFile.mjs'
import { openSecrets } from './secrets.mjs'
import { demoAccounts, makeStack, migrateStack, startDatabase, startMailCatcher, startQueueStore, startWeb, startWorker } from './stack.mjs'
import { Supervisor } from './supervisor.mjs'

const development = process.argv.includes('--dev')
let layout = null

function noteDetails(details) {
  if (!layout) return null
  const file = join(layout.log, 'launch.log')
  appendFileSync(file, `${new Date().toISOString()} ${details}\n`)
  return shown(file)
}

async function main() {
  const began = performance.now()
  requireNode()
  const ports = {
    web: portSetting('FARPOLE_WEB_PORT', 4870), database: portSetting('FARPOLE_DB_PORT', 4871),
    redis: portSetting('FARPOLE_REDIS_PORT', 4872), mail: portSetting('FARPOLE_MAIL_PORT', 4873),
  }
  layout = openLayout(process.env.FARPOLE_DATA_DIR || '.data')
  await requirePrograms()
  const stack = makeStack({ layout, ports, secrets: openSecrets(layout), mode: 'demo' })
  const claimed = await claim(layout, stack.baseUrl)
  const supervisor = new Supervisor(claimed)
  try {
    await requirePorts([
      { name: 'the web server', port: ports.web, setting: 'FARPOLE_WEB_PORT', host: process.env.FARPOLE_WEB_HOST || '127.0.0.1' },
      { name: 'MariaDB', port: ports.database, setting: 'FARPOLE_DB_PORT' },
      { name: 'Redis', port: ports.redis, setting: 'FARPOLE_REDIS_PORT' },
      { name: 'the mail catcher', port: ports.mail, setting: 'FARPOLE_MAIL_PORT' },
    ])
    await requirePackages(layout)
    await requireBuild(layout, development ? ['workers'] : ['web', 'workers'])
    supervisor.throwIfEnding()
    say('Starting MariaDB and Redis …')
    await supervisor.startTogether([() => startDatabase(stack), () => startQueueStore(stack)])
    await migrateStack(stack, ['--seed-demo'])
    say('Starting the web server and the solver workers …')
    await supervisor.startRestarting(() => startMailCatcher(stack))
    if (development) await startDevelopment(stack, supervisor)
    else {
      await Promise.all([supervisor.startTogether([() => startWeb(stack)]), supervisor.startRestarting(() => startWorker(stack))])
    }
    if (!supervisor.ending) greet(stack, began)
    await supervisor.ended()
  }
  catch (error) {
    throw supervisor.ending && !supervisor.fault ? new LaunchError('Stopped before it was ready.') : error
  }
  finally {
    await supervisor.stopAll()
    claimed.release()
  }
  process.exitCode ??= 0
}

function greet(stack, began) {
  const accounts = demoAccounts()
  const width = Math.max(...accounts.map(({ email }) => email.length))
  say([
    '',
    `Farpole answers at ${stack.baseUrl} (ready in ${seconds(began)}).`,
    '',
    `Demo accounts, all with the password ${accounts[0].password}:`,
    ...accounts.map(({ email, role }) => `  ${email.padEnd(width)}  ${role}`),
    '',
    `What Farpole would mail is kept here and shown at ${stack.baseUrl}/demo-mail.`,
    `Data and logs are in ${shown(stack.layout.data)}. Ctrl-C ends everything.`,
  ].join('\n'))
}

await runMain(main, noteDetails)
process.exit()
