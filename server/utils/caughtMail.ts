import { readFile, readdir } from 'node:fs/promises'
import { join } from 'node:path'
import { caughtMailSchema } from '#shared/schemas/accounts'
import type { CaughtMail } from '#shared/schemas/accounts'

const MOST = 100

/** Mails that the catcher has kept in a directory, newest first: their file names begin with the time. */
export async function readCaughtMail(directory: string): Promise<CaughtMail[]> {
  const names = (await readdir(directory).catch(() => [])).filter(name => name.endsWith('.json')).sort().reverse().slice(0, MOST)
  const texts = await Promise.all(names.map(name => readFile(join(directory, name), 'utf8')))
  return texts.map(text => caughtMailSchema.parse(JSON.parse(text)))
}
