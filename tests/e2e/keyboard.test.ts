import type { Page } from 'playwright-core'
import { describe, expect, it } from 'vitest'
import { account, finished, signIn } from '../integration/harness'
import { Visitor, useBrowser } from './visitor'

const browser = useBrowser()

/** Presses Tab until what has the focus answers to the test; throws after two hundred. Each stop must be seen. */
async function tabTo(page: Page, what: string, test: (focused: { id: string, name: string }) => boolean) {
  for (let k = 0; k < 200; k++) {
    await page.keyboard.press('Tab')
    const stop = await page.evaluate(() => {
      const element = document.activeElement
      if (!(element instanceof HTMLElement) || element === document.body) return null
      const box = element.getBoundingClientRect()
      const labels = element instanceof HTMLInputElement ? [...element.labels ?? []].map(label => label.innerText).join(' ') : ''
      const style = getComputedStyle(element)
      return {
        id: element.id, name: [labels, element.getAttribute('aria-label'), element.innerText].filter(Boolean).join(' '),
        seen: box.width > 0 && box.height > 0 && (style.outlineStyle !== 'none' || style.boxShadow !== 'none'),
      }
    })
    if (!stop) continue
    if (!stop.seen) throw new Error(`The focus cannot be seen on ${stop.id || stop.name}.`)
    if (test(stop)) return
  }
  throw new Error(`Tab never reached ${what}.`)
}

describe('without a pointer', () => {
  const focused = (page: Page) => page.evaluate(() => {
    const element = document.activeElement
    return { id: element?.id ?? '', name: element?.getAttribute('aria-label') ?? element?.textContent?.trim() ?? '', value: element?.getAttribute('aria-valuetext') ?? '' }
  })

  it('the whole job can be done: sign in, change the cell, ask for trials, queue, read, take away, keep as a preset', async () => {
    const visitor = await Visitor.open(browser())
    const { page } = visitor
    const { email, password } = account('researcher')
    await visitor.go('/signin')
    await tabTo(page, 'the address', ({ name }) => name.includes('E-mail'))
    await page.keyboard.type(email)
    await tabTo(page, 'the password', ({ name }) => name.includes('Password'))
    await page.keyboard.type(password)
    await page.keyboard.press('Enter')
    await page.waitForURL('**/bench')
    await visitor.settle()
    await expect.poll(() => focused(page).then(({ id }) => id)).toBe('main')

    // The cell's form is open. Values go up and down by key too.
    await tabTo(page, 'the damping', ({ name }) => name.includes('Damping'))
    await page.keyboard.press('Control+A')
    await page.keyboard.type('0.02')
    await page.keyboard.press('ArrowUp')
    expect(await page.getByLabel('Damping').first().inputValue()).toBe('0.021')
    await page.keyboard.press('Escape')
    expect((await focused(page)).id).toBe('part-device')

    await tabTo(page, 'the part with the trials', ({ id }) => id === 'part-counting')
    await page.keyboard.press('Enter')
    expect((await focused(page)).id).toBe('form-title')
    await tabTo(page, 'the trials', ({ name }) => name.includes('Trials'))
    await page.keyboard.press('Control+A')
    await page.keyboard.type('2000')
    await page.keyboard.press('Escape')
    expect((await focused(page)).id).toBe('part-counting')

    // A dialogue takes the focus and gives it back.
    await tabTo(page, 'Save preset', ({ name }) => name.trim() === 'Save preset')
    await page.keyboard.press('Enter')
    await page.getByRole('dialog').waitFor()
    expect(await page.evaluate(() => document.activeElement?.closest('dialog') !== null)).toBe(true)
    await page.keyboard.press('Escape')
    expect((await focused(page)).name).toBe('Save preset')

    await tabTo(page, 'Queue', ({ name }) => name.trim() === 'Queue')
    await page.keyboard.press('Enter')
    await page.waitForURL(/\/jobs\/[0-9A-Z]{26}$/)
    await expect.poll(() => focused(page).then(({ id }) => id)).toBe('main')

    const job = await finished(await signIn('researcher'), page.url().split('/').at(-1)!, 150_000)
    expect(job.spec).toMatchObject({ question: { trials: 2000 }, device: { damping: 0.021 } })
    await expect.poll(() => page.getByRole('heading', { level: 1 }).innerText(), { timeout: 20_000 }).toContain('ns')
    await expect.poll(() => page.title()).toMatch(/^done · How fast/)

    await tabTo(page, 'the cursor of a figure', ({ name }) => name.includes('Cursor on the figure: How many'))
    await page.keyboard.press('Home')
    const first = (await focused(page)).value
    await page.keyboard.press('PageDown')
    await page.keyboard.press('ArrowRight')
    await page.keyboard.press('ArrowRight')
    expect((await focused(page)).value).not.toBe(first)
    expect((await focused(page)).value).toMatch(/have not crossed/)
    await tabTo(page, 'its table', ({ name }) => name.includes('Table of: How many'))
    await page.keyboard.press('Enter')
    expect(await page.getByRole('region', { name: /^Table of: How many/ }).getByRole('row').count()).toBeGreaterThan(5)
    await tabTo(page, 'its download', ({ name }) => name.includes('Download as CSV: How many'))
    const [file] = await Promise.all([page.waitForEvent('download'), page.keyboard.press('Enter')])
    expect(file.suggestedFilename()).toMatch(/survival\.csv$/)

    await tabTo(page, 'Presets', ({ name }) => name.trim() === 'Presets')
    await page.keyboard.press('Enter')
    await page.waitForURL('**/presets')
    await expect.poll(() => focused(page).then(({ id }) => id)).toBe('main')
    await tabTo(page, 'the search', ({ name }) => name.includes('Search'))
    await page.keyboard.type('S-30')
    await expect.poll(() => page.getByRole('heading', { level: 2 }).count()).toBe(1)
    await tabTo(page, 'a preset of one’s own', ({ name }) => name.includes('Edit S-30'))
    await page.keyboard.press('Enter')
    await page.waitForURL(/\/presets\/[0-9A-Z]{26}$/)
    await expect.poll(() => focused(page).then(({ id }) => id)).toBe('main')
    await tabTo(page, 'the note', ({ name }) => name.includes('Note'))
    await page.keyboard.type(' Walked by keyboard.')
    await page.keyboard.press('Enter')
    await expect.poll(() => page.getByRole('heading', { level: 1 }).innerText()).toMatch(/^S-30, version \d+$/)
    await expect.poll(() => page.locator('main').innerText()).toContain('Walked by keyboard.')
    await tabTo(page, 'the way to the bench', ({ name }) => name.trim() === 'Use on the bench')
    await page.keyboard.press('Enter')
    await page.waitForURL('**/bench')
    await expect.poll(() => page.locator('footer').innerText()).toMatch(/preset S-30 v\d+/)
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })

  it('the navigation can be skipped on every page', async () => {
    const visitor = await Visitor.open(browser(), { role: 'researcher' })
    const { page } = visitor
    for (const path of ['/bench', '/home', '/jobs', '/presets']) {
      await visitor.go(path)
      await tabTo(page, 'the way past the navigation', ({ name }) => name === 'Skip to the page')
      await page.keyboard.press('Enter')
      expect((await focused(page)).id, path).toBe('main')
      await page.keyboard.press('Tab')
      expect(await page.evaluate(() => document.activeElement?.closest('main') !== null), path).toBe(true)
    }
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })
})
