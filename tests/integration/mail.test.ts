import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { ledgerPageSchema } from '#shared/schemas/accounts'
import type { LedgerLine, LedgerPage } from '#shared/schemas/accounts'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { settle } from '../../server/models/ledger'
import { postMail } from '../../server/models/outbox'
import { balanceOf } from '../../server/models/quota'
import { inTransaction } from '../../server/models/transaction'
import { endJobAsFailed } from '../../server/queue/failure'
import { addUser, addressOf } from '../support/people'
import { Client, finished, openTestDatabase, readJob, signIn, submit, switchingSpec, theStack, waitFor } from './harness'
import { mailTo, mailsTo } from './mailbox'

let db: Database
beforeAll(() => {
  db = openTestDatabase()
})
afterAll(() => closeDatabase(db))

const settled = (id: string) => waitFor(`job ${id} to be settled`, async () => (await db.models.Job.findByPk(id, { attributes: ['settledAt'] }))?.settledAt, 60_000)

describe('the end of a job', () => {
  it('is told its owner by mail, once, in the job’s own words and with its cautions', async () => {
    const user = await addUser(db)
    const client = await signIn(addressOf(user))
    const { id } = await submit(client, switchingSpec({ trials: 60 }))
    await finished(client, id)
    const job = await readJob(client, id)
    const mail = await mailTo(user.email)
    expect(mail.from).toBe('farpole@example.org')
    expect(mail.subject.replace(/…$/, '')).toContain(`Done: ${job.sentence}`.slice(0, 100))
    expect(mail.text).toContain(job.sentence)
    expect(mail.text).toContain(job.headline)
    expect(mail.text).toContain(`${theStack().baseUrl}/jobs/${id}`)
    for (const caution of job.answer?.words.cautions ?? []) expect(mail.text).toContain(caution)
    await settled(id)
    expect(await db.models.Mail.count({ where: { userId: user.id } })).toBe(1)
    expect(await mailsTo(user.email)).toHaveLength(1)
  })

  it('is told as each person has chosen, and not to those who are disabled', async () => {
    const quiet = await addUser(db)
    const client = await signIn(addressOf(quiet))
    await client.patch('/api/me', { notifyFinished: false })
    const { id } = await submit(client, switchingSpec({ trials: 40 }))
    await finished(client, id)
    const gone = await addUser(db)
    const leaving = await signIn(addressOf(gone))
    const last = await submit(leaving, switchingSpec({ trials: 40 }))
    await gone.update({ active: false })
    await settled(last.id)
    expect(await db.models.Mail.count({ where: { userId: [quiet.id, gone.id] } })).toBe(0)
  })

  it('is told with the reason when it has failed, however often the failure is noted', async () => {
    const user = await addUser(db)
    const client = await signIn(addressOf(user))
    const { id } = await submit(client, switchingSpec({ trials: 400_000 }))
    const fail = () => inTransaction(db, async (tx) => {
      await db.models.Job.findByPk(id, { attributes: ['id'], lock: tx.LOCK.UPDATE, transaction: tx })
      await endJobAsFailed(db, tx, id, 'The solver broke down on <trial> 7.')
    })
    await Promise.all([fail(), fail()])
    const mail = await mailTo(user.email)
    expect(mail.subject).toMatch(/^Failed: How fast/)
    expect(mail.text).toContain('The solver broke down on <trial> 7.')
    expect(mail.html).toContain('&lt;trial&gt;')
    await settled(id)
    expect(await db.models.Mail.count({ where: { userId: user.id } })).toBe(1)
  })
})

describe('the quota', () => {
  /** A user whose use is set by hand, with a job that is to be settled. */
  async function spender(limit: number, charged: number) {
    const user = await addUser(db, { quota: 3600 })
    const client = await signIn(addressOf(user))
    await client.patch('/api/me', { notifyFinished: false })
    const { id } = await submit(client, switchingSpec({ trials: 40 }))
    await settled(id)
    await db.models.LedgerEntry.update({ cpuMicros: charged * 1e6 }, { where: { jobId: id, kind: 'charge' } })
    await user.update({ quotaCpuMicros: limit * 1e6 })
    return { user, client, id }
  }
  const kinds = async (userId: string) => (await db.models.Mail.findAll({ where: { userId }, order: [['id', 'ASC']] })).map(mail => mail.kind)

  it('is mailed about once when use reaches 80 % and once at 100 %', async () => {
    const { user, client } = await spender(100, 79.9999)
    const use = async () => {
      const { id } = await submit(client, switchingSpec({ trials: 400 }))
      await settled(id)
    }
    await use()
    const mail = await mailTo(user.email)
    expect(mail.subject).toBe('You have used 80 % of your CPU time')
    await use()
    expect(await kinds(user.id)).toEqual(['quota80'])
    await user.update({ quotaCpuMicros: 3600e6 })
    const { id } = await submit(client, switchingSpec({ trials: 400_000 }))
    await user.update({ quotaCpuMicros: (await balanceOf(db, user.id)).charged + 1 })
    await waitFor('the job to use something', async () => (await readJob(client, id)).progress > 0, 60_000)
    await client.post(`/api/jobs/${id}/cancel`)
    await settled(id)
    expect((await mailTo(user.email, 2)).subject).toBe('Your CPU time is used up')
    expect(await kinds(user.id)).toEqual(['quota80', 'quota100'])
  })

  it('that an admin lowers below what was used is mailed about, and settling twice at once is settling once', async () => {
    const { user, id } = await spender(1000, 90)
    const boss = await signIn(addressOf(await addUser(db, { role: 'admin', teamId: user.teamId })))
    expect((await boss.patch(`/api/people/${user.id}`, { quotaCpuSeconds: 100, reason: 'fewer processors' })).status).toBe(200)
    expect((await mailTo(user.email)).text).toMatch(/used 1\sm\s30\ss of the 1\sm\s40\ss/u)
    await db.models.LedgerEntry.destroy({ where: { jobId: id, kind: ['release', 'charge'] } })
    await db.models.Job.update({ settledAt: null }, { where: { id } })
    const outcomes = await Promise.all([1, 2, 3].map(() => inTransaction(db, tx => settle(db, tx, id))))
    // The worker settles what it finds unsettled: it may have been first.
    expect(outcomes.filter(Boolean).length).toBeLessThanOrEqual(1)
    expect(await db.models.LedgerEntry.count({ where: { jobId: id } })).toBe(3)
    expect(await kinds(user.id)).toEqual(['quota80'])
  })
})

describe('a mail', () => {
  it('is written with its cause or not at all, once for each cause', async () => {
    const user = await addUser(db)
    const posting = { to: user.email, userId: user.id, dedupeKey: `test:${user.id}`, letter: { kind: 'jobFailed' as const, name: user.name, jobId: 'none', sentence: 'A question?', reason: 'A reason.' } }
    await expect(inTransaction(db, async (tx) => {
      await postMail(db, tx, posting)
      throw new Error('the cause failed')
    })).rejects.toThrow('the cause failed')
    expect(await db.models.Mail.count({ where: { userId: user.id } })).toBe(0)
    for (let k = 0; k < 2; k++) await inTransaction(db, tx => postMail(db, tx, posting))
    await mailTo(user.email)
    await inTransaction(db, tx => postMail(db, tx, posting))
    expect(await db.models.Mail.findAll({ where: { userId: user.id }, raw: true })).toMatchObject([{ state: 'sent', data: '', attempts: 1 }])
    expect(await mailsTo(user.email)).toHaveLength(1)
  })

  it('of the demo is read by people who have signed in alone', async () => {
    expect((await new Client(theStack().baseUrl).get('/api/demo-mail')).status).toBe(401)
  })
})

describe('the ledger', () => {
  const page = async (client: Client, query = '') => ledgerPageSchema.parse(await (await client.get(`/api/ledger${query}`)).json())

  async function whole(client: Client): Promise<{ entries: LedgerLine[], balance: LedgerPage['balance'] }> {
    const first = await page(client, '?limit=2')
    const entries = [...first.entries]
    for (let { next } = first; next !== null;) {
      const more = await page(client, `?limit=2&cursor=${next}`)
      entries.push(...more.entries)
      next = more.next
    }
    return { entries, balance: first.balance }
  }
  const micros = (seconds: number) => Math.round(seconds * 1e6)
  const sum = (entries: readonly LedgerLine[]) => entries.reduce((total, entry) => total + micros(entry.cpuSeconds), 0)

  it('adds up to what is charged and reserved, whatever was submitted, finished, cancelled and deleted', async () => {
    const user = await addUser(db)
    const client = await signIn(addressOf(user))
    const check = async () => {
      const { entries, balance } = await whole(client)
      expect(sum(entries)).toBe(micros(balance.charged) + micros(balance.reserved))
      expect(entries.map(entry => entry.id)).toEqual([...new Set(entries.map(entry => entry.id))].sort((a, b) => b - a))
      return { entries, balance }
    }
    expect((await check()).entries).toEqual([])
    const long = await submit(client, switchingSpec({ trials: 400_000 }))
    const reserved = await check()
    expect(reserved.entries).toMatchObject([{ kind: 'reserve', cpuSeconds: long.predictedCpuSeconds, job: { id: long.id, sentence: long.sentence } }])
    const short = await submit(client, switchingSpec({ trials: 60 }))
    await client.post(`/api/jobs/${long.id}/cancel`)
    await settled(long.id)
    await finished(client, short.id)
    await settled(short.id)
    const { entries, balance } = await check()
    expect(entries.map(entry => entry.kind).sort()).toEqual(['charge', 'charge', 'release', 'release', 'reserve', 'reserve'])
    expect(balance.reserved).toBe(0)
    await client.delete(`/api/jobs/${short.id}`)
    const later = (await check()).entries
    expect(later.filter(entry => entry.job === null)).toHaveLength(3)
    await db.models.LedgerEntry.update({ effectiveAt: new Date(Date.now() - 31 * 86_400_000) }, { where: { jobId: long.id } })
    expect((await check()).entries).toHaveLength(3)
    const other = await signIn(addressOf(await addUser(db, { teamId: user.teamId })))
    expect((await page(other)).entries).toEqual([])
    for (const query of ['?limit=0', '?limit=201', '?limit=1e1', '?cursor=1', '?cursor=1.x', '?cursor=1.2.3', `?user=${user.id}`, '?limit=2&limit=3']) {
      expect((await client.get(`/api/ledger${query}`)).status, query).toBe(422)
    }
  })
})
