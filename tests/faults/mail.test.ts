import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { deliverDue } from '../../server/mail/deliver'
import { smtpTransport } from '../../server/mail/transport'
import type { Mail } from '../../server/models/accounts'
import { postMail } from '../../server/models/outbox'
import { inTransaction } from '../../server/models/transaction'
import { Client, signIn, switchingSpec, waitFor } from '../integration/harness'
import { TestMailServer } from './mailServer'
import { figure, since, useStage } from './stage'

describe('A mail server that is down, slow or refusing', () => {
  const stage = useStage('faults-mail', 0)
  let server: TestMailServer
  beforeAll(async () => {
    server = new TestMailServer(stage().stack.stack.ports.mail)
    await stage().startWorker()
  })
  afterAll(() => server.stop())

  const mailOf = (jobId: string) => stage().db.models.Mail.findOne({ where: { dedupeKey: `job:${jobId}:done` } })
  const attempted = (jobId: string, attempts: number) => waitFor(`attempt ${attempts} at the mail of job ${jobId}`, async () => {
    const mail = await mailOf(jobId)
    return mail && mail.attempts >= attempts && mail.state !== 'sending' && mail
  }, 60_000)
  /** Has the next attempt at a mail come at once instead of after its wait. */
  const hurry = (mail: Mail) => stage().db.models.Mail.update({ nextAttemptAt: new Date(Date.now() - 1000) }, { where: { id: mail.id } })
  const job = async (seed: number) => {
    const started = performance.now()
    const id = await stage().submit(switchingSpec({ trials: 60, seed }), `mail-${seed}`)
    expect((await stage().settled(id, 60_000)).state).toBe('done')
    return { id, took: since(started) }
  }
  const sent = (jobId: string) => waitFor(`the mail of job ${jobId}`, async () => (await mailOf(jobId))?.state === 'sent', 60_000)
  const messages = (mail: Mail) => server.taken.filter(id => id.includes(mail.id.toLowerCase())).length

  it('holds up no job, and gets each mail once when it is back', async () => {
    const down = await job(1)
    const first = await attempted(down.id, 1)
    expect(first).toMatchObject({ state: 'waiting', error: 'ESOCKET' })
    await server.start()

    server.manner = 'silent'
    await hurry(first)
    await waitFor('a call', () => server.calls > 0)
    const slow = await job(2)
    const second = await attempted(down.id, 2)
    expect(second.error).toMatch(/^(ETIMEDOUT|EGREETING|ESOCKET)/)

    server.manner = 'later'
    await hurry(second)
    const third = await attempted(down.id, 3)
    expect(third).toMatchObject({ state: 'waiting', error: 'EENVELOPE 451' })
    expect(third.nextAttemptAt.getTime() - Date.now()).toBeGreaterThan(30_000)

    server.manner = 'takes'
    for (const { id } of [down, slow]) {
      const mail = await attempted(id, 1)
      if (mail.state === 'waiting') await hurry(mail)
      await sent(id)
      expect(messages(mail)).toBe(1)
      expect(await mailOf(id)).toMatchObject({ data: '', error: null })
    }
    figure('mail server down, then silent, then refusing', `jobs ended after ${down.took} and ${slow.took}, 2 mails sent, 0 duplicates`)
  })

  it('that refuses an address for good is asked three times and no more', async () => {
    server.manner = 'never'
    const { id } = await job(3)
    for (let attempts = 1; attempts < 3; attempts++) await hurry(await attempted(id, attempts))
    const mail = await waitFor('the mail to be given up', async () => {
      const row = await mailOf(id)
      return row?.state === 'failed' && row
    })
    expect(mail).toMatchObject({ attempts: 3, error: 'EENVELOPE 550', data: '' })
    expect(messages(mail)).toBe(0)
  })

  it('whose word is lost after it took a mail gets it again under the same name', async () => {
    server.manner = 'takes and is cut'
    const { id } = await job(4)
    const mail = await attempted(id, 1)
    expect(mail.state).toBe('waiting')
    server.manner = 'takes'
    await hurry(mail)
    await sent(id)
    expect(messages(mail)).toBe(2)
  })

  it('gets no mail twice when its sender is killed at work and others take over', async () => {
    server.manner = 'silent'
    const calls = server.calls
    const { id } = await job(5)
    await waitFor('a call', () => server.calls > calls)
    await stage().killWorkers()
    const mail = await waitFor('the mail', () => mailOf(id))
    expect(mail.state).toBe('sending')
    server.manner = 'takes'
    await Promise.all([stage().startWorker(), stage().startWorker()])
    const { id: next } = await job(6)
    await sent(next)
    expect(messages(mail), 'an attempt under way is nobody else’s').toBe(0)
    await hurry(mail)
    await sent(id)
    expect(messages(mail)).toBe(1)
  })

  it('gets each of many mails once from many senders at once', async () => {
    const { db, stack } = stage()
    const before = server.taken.length
    for (let k = 0; k < 40; k++) {
      await inTransaction(db, tx => postMail(db, tx, {
        to: `reader${k}@example.org`, dedupeKey: `many:${k}`, letter: { kind: 'jobFailed', name: 'Iris Vale', jobId: 'none', sentence: 'A question?', reason: 'A reason.' },
      }))
    }
    const office = { transport: smtpTransport(`smtp://127.0.0.1:${stack.stack.ports.mail}`), from: 'farpole@example.org', baseUrl: 'https://bits.example.org' }
    const never = new AbortController().signal
    await Promise.all([1, 2, 3].map(() => deliverDue(db, office, never)))
    await waitFor('all to be sent', async () => await db.models.Mail.count({ where: { state: 'sent' } }) >= 40 && await db.models.Mail.count({ where: { state: ['waiting', 'sending'] } }) === 0, 60_000)
    const taken = server.taken.slice(before)
    expect(taken).toHaveLength(40)
    expect(new Set(taken.map(id => id.split('@')[0])).size).toBe(40)
    figure('40 mails and 4 senders', `${taken.length} taken, 0 duplicates`)
  })
})

describe('An installation without a mail server', () => {
  const stage = useStage('faults-no-mail', 1)

  it('says so where a mail would be needed, and shows nobody’s mail', async () => {
    await stage().stack.webs[0]?.stop()
    await stage().stack.startWeb({ FARPOLE_ENV: 'production', FARPOLE_MAIL_URL: '', FARPOLE_MAIL_FROM: '', FARPOLE_DEMO_MAIL_DIR: '' })
    const admin = await signIn('admin', stage().stack.info.baseUrl)
    const invited = await admin.post('/api/invitations', { email: 'new@example.org', role: 'student' })
    expect(invited.status).toBe(409)
    expect(await invited.text()).toContain('npm run person')
    const anonymous = new Client(admin.baseUrl)
    const replies = await Promise.all(['admin@example.org', 'nobody@example.org'].map(email => anonymous.post('/api/password-resets', { email })))
    expect(replies.map(reply => reply.status)).toEqual([409, 409])
    expect((await admin.get('/api/demo-mail')).status).toBe(404)
  })
})
