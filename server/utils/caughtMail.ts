import { readFile, readdir } from 'node:fs/promises'
import { join } from 'node:path'
import { caughtMailSchema } from '#shared/schemas/accounts'
import type { CaughtMail } from '#shared/schemas/accounts'

const MOST = 100

/** Mails that the catcher has kept in a directory, newest first: their file names begin with the time. */
export async function readCaughtMail(directory: string): Promise<CaughtMail[]> {
  const names = (await readdir(directory).catch(() => [])).filter(name => name.endsWith('.json')).sort().reverse().slice(0, MOST)
  // The catcher may be removing its oldest ones just now.
  const texts = await Promise.all(names.map(name => readFile(join(directory, name), 'utf8').catch(() => null)))
  return texts.flatMap(text => text === null ? [] : [caughtMailSchema.parse(JSON.parse(text))])
}
