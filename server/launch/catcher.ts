import { mkdirSync } from 'node:fs'
import { readdir, rename, rm, writeFile } from 'node:fs/promises'
import { join } from 'node:path'
import { SMTPServer } from 'smtp-server'
import type { CaughtMail } from '#shared/schemas/accounts'
import { readSettings } from '#shared/schemas/settings'
import { readMail } from './readMail'

const LARGEST_BYTES = 1024 * 1024
const KEPT = 500

/** Command of the demo and the tests: a mail server that sends nothing on and keeps each mail as a file. */
function main() {
  const { mail, demoMailDirectory } = readSettings(process.env)
  if (!mail || demoMailDirectory === null) throw new Error('The catcher needs FARPOLE_MAIL_URL and FARPOLE_DEMO_MAIL_DIR.')
  mkdirSync(demoMailDirectory, { recursive: true, mode: 0o700 })
  const server = new SMTPServer({
    name: 'catcher.example.org', disabledCommands: ['AUTH', 'STARTTLS'], size: LARGEST_BYTES, logger: false, closeTimeout: 1000,
    onData(stream, session, callback) {
      const parts: Buffer[] = []
      stream.on('data', (part: Buffer) => parts.push(part))
      stream.on('end', () => {
        const { mailFrom, rcptTo } = session.envelope
        const from = mailFrom ? mailFrom.address : ''
        keep(demoMailDirectory, { from, to: rcptTo.map(({ address }) => address), ...readMail(Buffer.concat(parts)) }).then(() => callback(), callback)
      })
    },
  })
  server.on('error', error => console.error(error.message))
  server.listen(Number(new URL(mail.url).port), '127.0.0.1')
  for (const signal of ['SIGTERM', 'SIGINT'] as const) process.on(signal, () => server.close(() => process.exit(0)))
}

let count = 0

/** Writes a mail under a name that sorts by time, whole or not at all, and forgets the oldest beyond so many. */
async function keep(directory: string, mail: Omit<CaughtMail, 'id' | 'at'>): Promise<void> {
  const at = new Date()
  const id = `${at.toISOString().replace(/\D/g, '')}-${process.pid}-${String(count++ % 1e6).padStart(6, '0')}`
  const path = join(directory, `${id}.json`)
  await writeFile(`${path}.new`, JSON.stringify({ id, at: at.toISOString(), ...mail } satisfies CaughtMail, null, 2), { mode: 0o600 })
  await rename(`${path}.new`, path)
  const names = (await readdir(directory)).filter(name => name.endsWith('.json')).sort()
  for (const name of names.slice(0, Math.max(0, names.length - KEPT))) await rm(join(directory, name), { force: true })
}

try {
  main()
}
catch (error) {
  console.error(error instanceof Error ? error.message : error)
  process.exitCode = 1
}
