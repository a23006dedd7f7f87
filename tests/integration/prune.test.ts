import { randomUUID } from 'node:crypto'
import { afterAll, beforeAll, expect, it } from 'vitest'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { KEY_DAYS, pruneOld } from '../../server/models/prune'
import { openTestDatabase, signIn, submit, switchingSpec } from './harness'

const DAY_MS = 86_400_000

let db: Database
beforeAll(() => {
  db = openTestDatabase()
})
afterAll(() => closeDatabase(db))

it('removes keys and ended sessions when they are old, and no others', async () => {
  const client = await signIn('researcher')
  const key = randomUUID()
  const job = await submit(client, switchingSpec({ trials: 10, seed: 77 }), key)
  const ended = await signIn('student')
  await ended.delete('/api/session')
  const sessions = () => db.models.Session.count()
  const before = await sessions()

  await pruneOld(db, Date.now() + (KEY_DAYS - 1) * DAY_MS)
  expect((await submit(client, switchingSpec({ trials: 10, seed: 77 }), key)).id).toBe(job.id)
  expect(await sessions()).toBe(before)

  // Thirty-one days on, the session that was signed out of is gone; the other is within its month after ending.
  await pruneOld(db, Date.now() + 31 * DAY_MS)
  expect(await db.models.IdempotencyKey.count()).toBe(0)
  expect(await sessions()).toBeLessThan(before)
  expect((await client.get('/api/me')).status).toBe(200)
})
