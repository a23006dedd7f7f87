import { rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { exchange } from './ports.mjs'
import { findProgram, startProcess, waitUntil } from './processes.mjs'

/** Starts Redis on loopback with its data in the layout. The password is in a file that only its owner reads. */
export async function startRedis(layout, port, secrets, { extra = [] } = {}) {
  const config = join(layout.run, 'redis.conf')
  rmSync(config, { force: true })
  writeFileSync(config, [
    'bind 127.0.0.1', 'protected-mode yes', `port ${port}`, `dir ${JSON.stringify(layout.redis)}`, `requirepass ${secrets.redis}`,
    'daemonize no', 'save ""', 'appendonly yes', 'appendfsync everysec', 'maxmemory-policy noeviction', ...extra, '',
  ].join('\n'), { mode: 0o600 })
  const running = startProcess({ name: 'Redis', command: findProgram('redis-server'), args: [config], log: join(layout.log, 'redis.log') })
  try {
    await waitUntil(running, async () => {
      const reply = await exchange(port, `AUTH ${secrets.redis}\r\nPING\r\n`, text => text.split('\r\n').length > 2)
      return reply?.includes('+PONG') ?? false
    }, 30_000)
  }
  catch (error) {
    await running.stop()
    throw error
  }
  return running
}
