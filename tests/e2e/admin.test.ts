import { describe, expect, it } from 'vitest'
import { meSchema } from '#shared/schemas/api'
import { signIn } from '../integration/harness'
import { Visitor, useBrowser } from './visitor'

const browser = useBrowser()

describe('an admin', () => {
  it('sets a quota with its reason, which the history keeps, and the person’s next job beyond it is refused with its price', async () => {
    const visitor = await Visitor.open(browser(), { role: 'admin' })
    const { page } = visitor
    await visitor.go('/people')
    const row = page.getByRole('row').filter({ hasText: 'colleague@example.org' })
    await row.getByRole('button', { name: 'Change the quota' }).click()
    const form = page.getByRole('form', { name: 'Quota of Tomas Reed' })
    await form.getByLabel('New quota').fill('a day')
    await form.getByRole('button', { name: 'Set' }).click()
    await expect.poll(() => form.getByLabel('New quota').getAttribute('aria-invalid')).toBe('true')
    expect(await form.getByLabel('Reason').getAttribute('aria-invalid')).toBe('true')
    await form.getByLabel('New quota').fill('3.6 s')
    await form.getByLabel('Reason').fill('Only small trials this month.')
    expect(await visitor.accessibilityFaults()).toEqual([])
    await form.getByRole('button', { name: 'Set' }).click()
    await form.waitFor({ state: 'detached' })
    await row.getByRole('button', { name: 'History' }).click()
    await page.getByRole('listitem').filter({ hasText: 'Only small trials this month.' }).filter({ hasText: 'Petra Lund' }).waitFor()
    const colleague = await signIn('colleague@example.org')
    await expect.poll(async () => meSchema.parse(await (await colleague.get('/api/me')).json()).quota.limit).toBeCloseTo(3.6, 6)
    await visitor.close()
    expect(visitor.faults).toEqual([])

    const other = await Visitor.open(browser())
    await other.context.addCookies([cookieOf(colleague.cookie, colleague.baseUrl)])
    await other.go('/bench')
    await other.page.locator('#part-counting').click()
    await other.page.getByLabel('Trials').fill('900000')
    await other.page.getByRole('button', { name: 'Queue' }).click()
    await expect.poll(() => other.page.getByRole('alert').allInnerTexts().then(texts => texts.join(' ')), { timeout: 10_000 }).toMatch(/Refused: it takes about .+ left/)
    expect(new URL(other.page.url()).pathname).toBe('/bench')
    await other.close()
  })
})

function cookieOf(cookie: string, url: string) {
  const [name = '', value = ''] = cookie.split(/=(.*)/s)
  return { name, value, url, httpOnly: true }
}
