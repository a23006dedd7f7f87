import { QueryTypes } from 'sequelize'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { invitationListSchema, invitationSchema, invitationSeenSchema, sessionListSchema } from '#shared/schemas/accounts'
import { meSchema, problemSchema } from '#shared/schemas/api'
import type { Role } from '#shared/schemas/api'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { newId } from '../../server/models/id'
import type { User } from '../../server/models/people'
import { wishForReset } from '../../server/models/reset'
import { hashToken } from '../../server/models/tokens'
import { addUser, addressOf } from '../support/people'
import { Client, account, openTestDatabase, openTestRedis, signIn, theStack, waitFor } from './harness'
import { mailTo, mailsTo, tokenIn } from './mailbox'

const PASSWORD = 'tower river candle moss'
const redis = openTestRedis()
let db: Database
let admin: Client

beforeAll(async () => {
  db = openTestDatabase()
  admin = await signIn('admin')
})
// Many strangers of these tests come from one address.
beforeEach(async () => {
  const counts = await redis.keys('farpole:*')
  if (counts.length > 0) await redis.del(counts)
})
afterAll(async () => {
  redis.disconnect()
  await closeDatabase(db)
})

const anonymous = () => new Client(theStack().baseUrl)
const newAddress = () => `${newId().toLowerCase()}@example.org`
const status = async (reply: Promise<Response>) => (await reply).status
const problem = async (reply: Response) => problemSchema.parse(await reply.json())
const invite = async (email: string, role: Role = 'researcher') => invitationSchema.parse(await (await admin.post('/api/invitations', { email, role })).json())
const look = (token: string) => anonymous().post('/api/invitations/look', { token })
const accept = (token: string, values: object = {}, client = anonymous()) => client.post('/api/invitations/accept', { token, name: 'Nils Arden', password: PASSWORD, ...values })
const signInStatus = (email: string, password: string) => status(anonymous().post('/api/session', { email, password }))

describe('an invitation', () => {
  it('comes by mail, says what it offers, and makes one account in that role for that address', async () => {
    const email = newAddress()
    const invitation = await invite(email.toUpperCase(), 'student')
    expect(invitation).toMatchObject({ email, role: 'student', invitedBy: { name: 'Petra Lund' } })
    expect(Date.parse(invitation.expiresAt) - Date.parse(invitation.createdAt)).toBeCloseTo(7 * 86_400_000, -4)
    const mail = await mailTo(email)
    expect(mail.text).toContain(`${theStack().baseUrl}/join#token=`)
    expect(mail.text).toMatch(/Petra Lund invites you to join Quill lab as a student/)
    const token = tokenIn(mail)
    expect(token.length).toBeGreaterThanOrEqual(43)
    expect(JSON.stringify(await db.models.Invitation.findAll({ raw: true }))).not.toContain(token)
    expect(invitationSeenSchema.parse(await (await look(token)).json())).toEqual({ email, role: 'student', team: 'Quill lab' })

    const client = anonymous()
    const joined = await accept(token, {}, client)
    expect(joined.status).toBe(200)
    expect(meSchema.parse(await joined.json())).toMatchObject({ user: { email, name: 'Nils Arden', role: 'student' }, team: { name: 'Quill lab' } })
    expect(await status(client.get('/api/me'))).toBe(200)
    expect(await signInStatus(email, PASSWORD)).toBe(200)
    const again = await accept(token)
    expect([again.status, (await problem(again)).type]).toEqual([410, 'link-not-valid'])
    expect(await status(look(token))).toBe(410)
    expect(await db.models.User.count({ where: { email } })).toBe(1)
  })

  it('makes one account when its link is used twice at once', async () => {
    const email = newAddress()
    await invite(email)
    const token = tokenIn(await mailTo(email))
    const replies = await Promise.all([accept(token), accept(token), accept(token)])
    expect(replies.map(reply => reply.status).sort()).toEqual([200, 410, 410])
    expect(await db.models.User.count({ where: { email } })).toBe(1)
  })

  it('takes the place of an earlier one, can be taken back, and ends after its days', async () => {
    const email = newAddress()
    await invite(email, 'student')
    const first = tokenIn(await mailTo(email))
    await invite(email, 'researcher')
    const second = tokenIn(await mailTo(email, 2))
    expect(await status(look(first))).toBe(410)
    expect(await (await look(second)).json()).toMatchObject({ role: 'researcher' })
    const open = invitationListSchema.parse(await (await admin.get('/api/invitations')).json()).invitations.filter(known => known.email === email)
    expect(open).toHaveLength(1)
    expect(JSON.stringify(open)).not.toContain(hashToken(second))
    await db.models.Invitation.update({ expiresAt: new Date(Date.now() - 1000) }, { where: { email } })
    expect(await status(accept(second))).toBe(410)
    const { id } = await invite(email)
    const third = tokenIn(await mailTo(email, 3))
    expect(await status(admin.delete(`/api/invitations/${id}`))).toBe(204)
    expect(await status(admin.delete(`/api/invitations/${id}`))).toBe(404)
    expect(await status(accept(third))).toBe(410)
    expect(await db.models.User.count({ where: { email } })).toBe(0)
  })

  it('is bound to its address and role, and wants a name and a password worth having', async () => {
    const email = newAddress()
    await invite(email)
    const token = tokenIn(await mailTo(email))
    for (const values of [
      { email: 'other@example.org' }, { role: 'admin' }, { name: 'Nils\r\nBcc: all@example.org' }, { name: ' ' }, { password: 'short' },
      { password: 'password1234' }, { password: 'nils arden 1' }, { password: `${email}` }, { password: 'x'.repeat(300) },
    ]) expect(await status(accept(token, values)), JSON.stringify(values)).toBe(422)
    expect((await problem(await accept(token, { password: 'Password1234' }))).errors?.[0]?.pointer).toBe('/password')
    expect(await status(accept(token))).toBe(200)
  })

  it('is refused clearly for somebody who is there, also of another team or disabled, and sent by admins of this team alone', async () => {
    const there = account('student').email
    const refused = await admin.post('/api/invitations', { email: there, role: 'student' })
    expect([refused.status, (await problem(refused)).detail]).toEqual([409, `${there} has an account already.`])
    const stranger = await addUser(db)
    expect(await status(admin.post('/api/invitations', { email: stranger.email, role: 'student' }))).toBe(409)
    const foreignAdmin = await signIn(addressOf(await addUser(db, { role: 'admin' })))
    const { id } = await invite(newAddress())
    expect(await status(foreignAdmin.delete(`/api/invitations/${id}`))).toBe(404)
    expect(await (await foreignAdmin.get('/api/invitations')).text()).not.toContain(id)
    for (const body of [{ email: 'x', role: 'student' }, { email: newAddress(), role: 'owner' }, { email: 'a@example.org\r\nBcc: b@example.org', role: 'student' }]) {
      expect(await status(admin.post('/api/invitations', body))).toBe(422)
    }
  })

  it('is not accepted from another site', async () => {
    const email = newAddress()
    await invite(email)
    const token = tokenIn(await mailTo(email))
    const body = { token, name: 'Nils Arden', password: PASSWORD }
    expect(await status(anonymous().post('/api/invitations/accept', body, { Origin: 'https://evil.example.org' }))).toBe(403)
    expect(await status(accept(token))).toBe(200)
  })
})

describe('a new password by mail', () => {
  const ask = (email: string) => anonymous().post('/api/password-resets', { email })
  const confirm = (token: string, password = PASSWORD) => anonymous().post('/api/password-resets/confirm', { token, password })

  const wishesRead = () => waitFor('all wishes to be read', async () =>
    (await db.sequelize.query('SELECT email FROM resetWishes', { type: QueryTypes.SELECT })).length === 0)

  it('is asked for with one reply for everyone, and mailed to those who have an account', async () => {
    const user = await addUser(db)
    const nobody = newAddress()
    const replies = await Promise.all([ask(user.email), ask(nobody)])
    expect(replies.map(reply => reply.status)).toEqual([202, 202])
    const [known, unknown] = await Promise.all(replies.map(reply => reply.text()))
    expect(known).toBe(unknown)
    await mailTo(user.email)
    await wishesRead()
    expect(await db.models.Mail.count({ where: { recipient: nobody } })).toBe(0)
    const disabled = await addUser(db)
    await disabled.update({ active: false })
    expect(await status(ask(disabled.email))).toBe(202)
    await wishesRead()
    expect(await db.models.Mail.count({ where: { recipient: disabled.email } })).toBe(0)
  })

  it('costs the same work for every address: the same statements, none of which reads who has an account', async () => {
    const user = await addUser(db)
    const workFor = async (email: string) => {
      const statements: string[] = []
      const options = Reflect.get(db.sequelize, 'options') as { logging: false | ((sql: string) => void) }
      options.logging = sql => statements.push(sql.replaceAll(email, 'ADDRESS'))
      await wishForReset(db, email).finally(() => { options.logging = false })
      return statements
    }
    const known = await workFor(user.email)
    expect(known).toEqual(await workFor(newAddress()))
    expect(known.join()).not.toMatch(/\busers\b/)
  })

  it('works once, ends every session, and leaves the old password behind', async () => {
    const user = await addUser(db)
    const sessions = [await signIn(addressOf(user)), await signIn(addressOf(user))]
    await ask(user.email)
    const token = tokenIn(await mailTo(user.email))
    expect(await status(confirm(token, 'password1234'))).toBe(422)
    expect(await status(confirm(token, 'Ansel Moor 12'))).toBe(422)
    expect(await status(sessions[0]!.get('/api/me'))).toBe(200)
    const replies = await Promise.all([confirm(token), confirm(token)])
    expect(replies.map(reply => reply.status).sort()).toEqual([204, 410])
    for (const session of sessions) expect(await status(session.get('/api/me'))).toBe(401)
    expect(await signInStatus(user.email, account('student').password)).toBe(401)
    expect(await signInStatus(user.email, PASSWORD)).toBe(200)
    expect(await status(confirm(token, 'seven grey herons here'))).toBe(410)
  })

  it('ends after its hour, when a newer one comes, with a change of password and with the account', async () => {
    const user = await addUser(db)
    const linkFor = async (count: number) => {
      // The next wish of a user is heard after a minute.
      await db.models.Mail.update({ createdAt: new Date(Date.now() - 3_600_001) }, { where: { userId: user.id } })
      await ask(user.email)
      return tokenIn(await mailTo(user.email, count))
    }
    const first = await linkFor(1)
    const second = await linkFor(2)
    expect(await status(confirm(first))).toBe(410)
    await db.models.Reset.update({ expiresAt: new Date(Date.now() - 1000) }, { where: { userId: user.id } })
    expect(await status(confirm(second))).toBe(410)
    const third = await linkFor(3)
    const client = await signIn(addressOf(user))
    expect(await status(client.post('/api/me/password', { current: account('student').password, password: PASSWORD }))).toBe(204)
    expect(await status(confirm(third))).toBe(410)
    const fourth = await linkFor(4)
    await user.update({ active: false })
    expect(await status(confirm(fourth))).toBe(410)
    expect(await status(confirm('no-such-token'))).toBe(410)
  })

  it('is mailed once a minute however often it is asked for, and asking is throttled', async () => {
    const user = await addUser(db)
    const statuses: number[] = []
    for (let k = 0; k < 6; k++) statuses.push(await status(ask(user.email)))
    expect(statuses).toEqual([202, 202, 202, 202, 202, 429])
    await mailTo(user.email)
    await wishesRead()
    expect(await db.models.Mail.count({ where: { recipient: user.email } })).toBe(1)
  })

  it('leaves no link behind in the database once it is sent', async () => {
    const user = await addUser(db)
    await ask(user.email)
    const token = tokenIn(await mailTo(user.email))
    const row = await waitFor('the mail to be marked', () => db.models.Mail.findOne({ where: { recipient: user.email, state: 'sent' } }))
    expect(row.data).toBe('')
    expect(JSON.stringify([await db.models.Mail.findAll({ raw: true }), await db.models.Reset.findAll({ raw: true })])).not.toContain(token)
    expect(await mailsTo(user.email)).toHaveLength(1)
  })
})

describe('the own account', () => {
  let user: User
  let client: Client
  beforeAll(async () => {
    user = await addUser(db, { role: 'student' })
  })
  beforeEach(async () => {
    client = await signIn(addressOf(user))
  })

  it('has a name and a choice of mails, and nothing else that its owner can change', async () => {
    const reply = await client.patch('/api/me', { name: '  Ansel <b>Moor</b> ', notifyFinished: false })
    expect(meSchema.parse(await reply.json()).user).toMatchObject({ name: 'Ansel <b>Moor</b>', notifyFinished: false, notifyFailed: true, role: 'student' })
    for (const body of [{ role: 'admin' }, { email: 'x@example.org' }, { active: false }, { quotaCpuMicros: 1 }, { name: '' }, { name: 'a\nb' }, { notifyFailed: 'no' }]) {
      expect(await status(client.patch('/api/me', body)), JSON.stringify(body)).toBe(422)
    }
    expect(await status(client.patch('/api/me', {}))).toBe(200)
    await client.patch('/api/me', { name: 'Ansel Moor', notifyFinished: true })
  })

  it('gets a new password for the present one, and every other session ends', async () => {
    const other = await signIn(addressOf(user))
    const before = new Client(client.baseUrl, client.cookie)
    const wrong = await client.post('/api/me/password', { current: 'not the password', password: PASSWORD })
    expect([wrong.status, (await problem(wrong)).errors?.map(error => error.pointer)]).toEqual([422, ['/current']])
    expect(await status(client.post('/api/me/password', { current: account('student').password, password: 'passwordpassword' }))).toBe(422)
    expect(await status(other.get('/api/me'))).toBe(200)
    expect(await status(client.post('/api/me/password', { current: account('student').password, password: PASSWORD }))).toBe(204)
    expect(await status(client.get('/api/me'))).toBe(200)
    expect(await status(other.get('/api/me'))).toBe(401)
    expect(await status(before.get('/api/me'))).toBe(401)
    expect(await signInStatus(user.email, PASSWORD)).toBe(200)
    await user.reload()
    await user.update({ passwordHash: (await addUser(db)).passwordHash })
  })

  it('lets nobody guess its password through an open session', async () => {
    const statuses: number[] = []
    for (let k = 0; k < 9; k++) statuses.push(await status(client.post('/api/me/password', { current: `guess ${k}`, password: PASSWORD })))
    expect(statuses).toEqual([...Array.from({ length: 8 }, () => 422), 429])
  })

  it('lists its sessions and ends any of them, and nobody else’s', async () => {
    const other = await signIn(addressOf(user))
    const { sessions } = sessionListSchema.parse(await (await client.get('/api/sessions')).json())
    expect(sessions.filter(session => session.current)).toHaveLength(1)
    const [theirs] = sessionListSchema.parse(await (await other.get('/api/sessions')).json()).sessions.filter(session => session.current)
    expect(await status(client.delete(`/api/sessions/${theirs!.id}`))).toBe(204)
    expect(await status(other.get('/api/me'))).toBe(401)
    expect(await status(client.get('/api/me'))).toBe(200)
    expect(await status(client.delete(`/api/sessions/${theirs!.id}`))).toBe(404)
    const foreign = await db.models.Session.findOne({ where: { userId: (await db.models.User.findOne({ where: { email: account('admin').email }, rejectOnEmpty: true })).id, revokedAt: null }, rejectOnEmpty: true })
    expect(await status(client.delete(`/api/sessions/${foreign.id}`))).toBe(404)
    expect(await status(admin.get('/api/me'))).toBe(200)
    const own = sessions.find(session => session.current)!
    expect(await status(client.delete(`/api/sessions/${own.id}`))).toBe(204)
    expect(await status(client.get('/api/me'))).toBe(401)
  })
})
