import { once } from 'node:events'
import net from 'node:net'
import os from 'node:os'
import { describe, expect, it } from 'vitest'
import { unacknowledged } from '../../server/utils/connections'
import { waitFor } from '../integration/harness'

/** A connection on loopback, both ends. */
async function connect(host: string): Promise<{ server: net.Server, near: net.Socket, far: net.Socket }> {
  const server = net.createServer().listen(0, host)
  await once(server, 'listening')
  const address = server.address()
  if (address === null || typeof address === 'string') throw new Error('The server has no port.')
  const arrives = once(server, 'connection') as Promise<[net.Socket]>
  const far = net.connect(address.port, host)
  const [near] = await arrives
  return { server, near, far }
}

const loopbacks = Object.values(os.networkInterfaces()).flatMap(addresses => addresses ?? []).filter(({ internal }) => internal).map(({ address }) => address)

describe('connections whose other side does not acknowledge', () => {
  it.each(loopbacks)('are told from those that do, by %s', async (host) => {
    const [silent, heard] = [await connect(host), await connect(host)]
    const sockets = [silent.near, heard.near]
    try {
      // Whoever does not read closes its window in the end: the kernel's view of a reader that is gone.
      silent.far.pause()
      heard.far.resume()
      silent.near.write(Buffer.alloc(32 * 1024 * 1024))
      heard.near.write('a beat')
      expect([...await waitFor('the window to close', async () => {
        const found = await unacknowledged(sockets)
        return found.size === 1 && found
      })]).toEqual([silent.near])
      silent.far.resume()
      await waitFor('the rest to arrive', async () => (await unacknowledged(sockets)).size === 0)
    }
    finally {
      for (const { server, near, far } of [silent, heard]) {
        near.destroy()
        far.destroy()
        server.close()
      }
    }
  })
})
