import type { Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { newId } from '../../server/models/id'
import { Client, account, openTestDatabase, signIn, theStack, waitFor } from '../integration/harness'
import { addUser, addressOf } from '../support/people'
import { Visitor, useBrowser } from './visitor'

const browser = useBrowser()
const PHRASE = 'lantern gravel otter seven'
let db: Database

beforeAll(() => {
  db = openTestDatabase()
})
afterAll(() => closeDatabase(db))

/** Waits on the page of caught mail for one to that address, opens it and answers the link in its text. */
async function linkOf(page: Page, address: string, path: string): Promise<string> {
  const entry = page.getByRole('list', { name: 'Mails' }).getByRole('button').filter({ hasText: address }).first()
  await entry.click({ timeout: 60_000 })
  const link = page.getByRole('article').getByRole('link', { name: path })
  return await link.getAttribute('href') ?? ''
}

const status = async (email: string, password: string) => (await new Client(theStack().baseUrl).post('/api/session', { email, password })).status

describe('an invitation', () => {
  it('goes by mail, and its link joins the team once, in the role it was given for', async () => {
    const email = `${newId().toLowerCase()}@example.org`
    const admin = await Visitor.open(browser(), { role: 'admin' })
    await admin.go('/people')
    const form = admin.page.getByRole('form', { name: 'Invite someone' })
    await form.getByLabel('E-mail address').fill('ansel.moor')
    await form.getByRole('button', { name: 'Send the invitation' }).click()
    await expect.poll(() => form.getByLabel('E-mail address').getAttribute('aria-invalid')).toBe('true')
    await form.getByLabel('E-mail address').fill(email)
    await form.getByRole('radio', { name: 'student' }).check()
    await form.getByRole('button', { name: 'Send the invitation' }).click()
    await admin.page.getByRole('button', { name: `Withdraw the invitation of ${email}` }).waitFor()
    await form.getByRole('link', { name: 'Read the mail here' }).click()
    await admin.page.waitForURL('**/demo-mail')
    const link = await linkOf(admin.page, email, '/join')
    await admin.page.getByRole('button', { name: 'HTML' }).click()
    await admin.page.frameLocator('iframe').getByRole('link', { name: 'Choose a name and a password' }).waitFor()

    const newcomer = await Visitor.open(browser())
    await newcomer.go(link)
    expect(newcomer.page.url()).not.toContain('token')
    await expect.poll(() => newcomer.page.getByRole('heading', { level: 1 }).innerText()).toBe('Join Quill lab as student.')
    expect(await newcomer.accessibilityFaults()).toEqual([])
    await newcomer.page.getByLabel('Name').fill('Ansel Moor')
    await newcomer.page.getByLabel('Password', { exact: true }).fill('quill lab 1')
    await newcomer.page.getByRole('button', { name: 'Join the team' }).click()
    await expect.poll(() => newcomer.page.getByLabel('Password', { exact: true }).getAttribute('aria-invalid')).toBe('true')
    await newcomer.page.getByLabel('Password', { exact: true }).fill(PHRASE)
    await newcomer.page.getByRole('button', { name: 'Join the team' }).click()
    await newcomer.page.getByRole('link', { name: 'Ansel Moor · student' }).waitFor()

    const late = await Visitor.open(browser())
    await late.go(link)
    await expect.poll(() => late.page.getByRole('heading', { level: 1 }).innerText()).toBe('This invitation does not hold any more.')
    for (const visitor of [admin, newcomer]) {
      await visitor.close()
      expect(visitor.faults).toEqual([])
    }
  })
})

describe('a forgotten password', () => {
  it('is replaced by a link from the mail, and the old one is refused', async () => {
    const email = addressOf(await addUser(db))
    const visitor = await Visitor.open(browser())
    const { page } = visitor
    await visitor.go('/signin')
    await page.getByRole('link', { name: 'Forgot your password?' }).click()
    await page.waitForURL('**/forgot')
    await page.getByLabel('E-mail address').fill(email)
    await page.getByRole('button', { name: 'Send a link' }).click()
    await page.getByRole('heading', { name: 'Look into your mail' }).waitFor()

    const reader = await Visitor.open(browser(), { role: 'student' })
    await reader.go('/demo-mail')
    await visitor.go(await linkOf(reader.page, email, '/reset'))
    await reader.close()
    expect(page.url()).not.toContain('token')
    await page.getByLabel('New password', { exact: true }).fill(PHRASE)
    await page.getByRole('button', { name: 'Show what is typed' }).click()
    expect(await page.getByLabel('New password', { exact: true }).inputValue()).toBe(PHRASE)
    await page.getByRole('button', { name: 'Set the password' }).click()
    await expect.poll(() => page.getByRole('heading', { level: 1 }).innerText()).toBe('The new password holds.')
    expect([await status(email, account('student').password), await status(email, PHRASE)]).toEqual([401, 200])
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })
})

describe('one’s own account', () => {
  it('shows the sessions and the sum of CPU time, and a new password ends the other sessions', async () => {
    const email = addressOf(await addUser(db))
    const elsewhere = await signIn(email)
    const visitor = await Visitor.open(browser(), { as: email })
    const { page } = visitor
    await visitor.go('/jobs')
    await page.getByRole('link', { name: 'Ansel Moor · researcher' }).click()
    await page.waitForURL('**/profile')
    await page.getByText(/charged 0.s \+ reserved 0.s = 0.s of 3600.s/).waitFor()
    const sessions = page.getByRole('region', { name: 'Where you are signed in' })
    expect(await sessions.getByRole('listitem').count()).toBe(2)
    expect(await sessions.getByText('this one').count()).toBe(1)

    const form = page.getByRole('region', { name: 'Change the password' })
    await form.getByLabel('Present password', { exact: true }).fill('not this one at all')
    await form.getByLabel('New password', { exact: true }).fill(PHRASE)
    await form.getByRole('button', { name: 'Change it' }).click()
    await expect.poll(() => form.getByLabel('Present password', { exact: true }).getAttribute('aria-invalid')).toBe('true')
    expect(await form.getByLabel('New password', { exact: true }).inputValue()).toBe(PHRASE)
    await form.getByLabel('Present password', { exact: true }).fill(account('student').password)
    await form.getByRole('button', { name: 'Change it' }).click()
    await expect.poll(() => sessions.getByRole('listitem').count()).toBe(1)
    await waitFor('the other session to end', async () => (await elsewhere.get('/api/me')).status === 401)
    await visitor.close()
    // The browser's own word on the refusal of the wrong password.
    expect(visitor.faults).toEqual([expect.stringContaining('422')])
  })
})
