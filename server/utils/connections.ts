import { readFile } from 'node:fs/promises'
import type { Socket } from 'node:net'

const TABLES = ['/proc/self/net/tcp', '/proc/self/net/tcp6']

/**
 * Those of the sockets to which bytes were sent that the other side has not acknowledged, after the kernel's own table (Linux).
 * Elsewhere, where there is no such table, none.
 */
export async function unacknowledged(sockets: readonly Socket[]): Promise<Set<Socket>> {
  const waiting = new Set<string>()
  for (const table of TABLES) {
    const text = await readFile(table, 'latin1').catch(() => '')
    for (const line of text.split('\n').slice(1)) {
      const [, local, remote, , queues] = line.trim().split(/\s+/)
      if (local && remote && queues && !queues.startsWith('00000000:')) waiting.add(`${portOf(local)} ${remote}`)
    }
  }
  return new Set(sockets.filter(({ localPort, remotePort, remoteAddress }) => {
    if (localPort === undefined || remotePort === undefined || remoteAddress === undefined) return false
    return waiting.has(`${localPort} ${kernelAddress(remoteAddress)}:${remotePort.toString(16).toUpperCase().padStart(4, '0')}`)
  }))
}

const portOf = (address: string): number => parseInt(address.slice(address.lastIndexOf(':') + 1), 16)

/** An IP address as the table writes it: 32-bit words, each in the machine's byte order (little endian wherever this runs). */
function kernelAddress(address: string): string {
  const words = address.includes(':') ? wordsOfV6(address) : [address.split('.').map(Number)]
  return words.map(bytes => [...bytes].reverse().map(byte => byte.toString(16).toUpperCase().padStart(2, '0')).join('')).join('')
}

function wordsOfV6(address: string): number[][] {
  const plain = address.replace(/%.*$/, '').replace(/(\d+)\.(\d+)\.(\d+)\.(\d+)$/, (_, a: string, b: string, c: string, d: string) =>
    `${(Number(a) * 256 + Number(b)).toString(16)}:${(Number(c) * 256 + Number(d)).toString(16)}`)
  const [head = '', tail] = plain.split('::')
  const groups = (part: string) => part === '' ? [] : part.split(':').map(group => parseInt(group, 16))
  const [first, last] = [groups(head), tail === undefined ? [] : groups(tail)]
  const all = [...first, ...Array.from({ length: 8 - first.length - last.length }, () => 0), ...last]
  const bytes = all.flatMap(group => [group >> 8, group & 255])
  return [0, 4, 8, 12].map(start => bytes.slice(start, start + 4))
}
