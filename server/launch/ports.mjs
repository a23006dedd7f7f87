import { createServer, connect } from 'node:net'
import { LaunchError } from './messages.mjs'

function isFree(port, host) {
  return new Promise((done) => {
    const server = createServer()
    server.once('error', error => done(error.code === 'EADDRINUSE' ? false : error.code))
    server.listen({ port, host, exclusive: true }, () => server.close(() => done(true)))
  })
}

/** Checks that every port is free. Throws LaunchError naming the settings to change. */
export async function requirePorts(ports) {
  const faults = []
  for (const { name, port, setting, host = '127.0.0.1' } of ports) {
    const free = await isFree(port, host)
    if (free === false) faults.push(`Port ${port} for ${name} is taken by another program. Choose another one, for example: ${setting}=${port + 100} npm start`)
    else if (free !== true) faults.push(`Port ${port} for ${name} cannot be opened on ${host} (${free}). Change ${setting}.`)
  }
  const twice = ports.find(({ port }, k) => ports.findIndex(other => other.port === port) !== k)
  if (twice) faults.push(`Port ${twice.port} is set for two services. Change ${twice.setting}.`)
  if (faults.length > 0) throw new LaunchError(faults.join('\n'))
}

/** One exchange with a text service: sends `text`, answers what comes back until `enough`, or null when nobody is there. */
export function exchange(port, text, enough, withinMs = 1000) {
  return new Promise((done) => {
    const socket = connect({ port, host: '127.0.0.1' })
    let reply = ''
    const end = (value) => {
      socket.destroy()
      done(value)
    }
    socket.setTimeout(withinMs, () => end(null))
    socket.setEncoding('utf8')
    socket.once('error', () => end(null))
    socket.once('close', () => end(null))
    socket.on('data', (part) => {
      reply += part
      if (enough(reply)) end(reply)
    })
    socket.write(text)
  })
}
