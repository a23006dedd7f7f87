import { describe, expect, it } from 'vitest'
import { meSchema } from '#shared/schemas/api'
import { signIn } from '../integration/harness'
import { Visitor, useBrowser } from './visitor'

const browser = useBrowser()

describe('an admin', () => {
  it('sets a quota, and the person’s next job beyond it is refused with its price', async () => {
    const visitor = await Visitor.open(browser(), { role: 'admin' })
    const { page } = visitor
    await visitor.go('/people')
    const row = page.getByRole('row').filter({ hasText: 'colleague@example.org' })
    await row.getByRole('textbox').fill('a day')
    await row.getByRole('button', { name: 'Set' }).click()
    await expect.poll(() => row.getByRole('textbox').getAttribute('aria-invalid')).toBe('true')
    await row.getByRole('textbox').fill('0.001')
    await row.getByRole('button', { name: 'Set' }).click()
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
