import type { Page } from 'playwright-core'
import { describe, expect, it } from 'vitest'
import { account, finished, signIn } from '../integration/harness'
import { Visitor, useBrowser } from './visitor'

const browser = useBrowser()

/** Presses Tab until what has the focus answers to the test; throws after a hundred. Each stop must be seen. */
async function tabTo(page: Page, what: string, test: (focused: { id: string, name: string }) => boolean) {
  for (let k = 0; k < 100; k++) {
    await page.keyboard.press('Tab')
    const focused = await page.evaluate(() => {
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
    if (!focused) continue
    if (!focused.seen) throw new Error(`The focus cannot be seen on ${focused.id || focused.name}.`)
    if (test(focused)) return
  }
  throw new Error(`Tab never reached ${what}.`)
}

describe('without a pointer', () => {
  it('the whole job can be done: sign in, change the cell, ask for trials, queue, read', async () => {
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

    await tabTo(page, 'the part with the trials', ({ id }) => id === 'part-counting')
    await page.keyboard.press('Enter')
    await tabTo(page, 'the trials', ({ name }) => name.includes('Trials'))
    await page.keyboard.press('Control+A')
    await page.keyboard.type('2000')
    await page.keyboard.press('Escape')
    expect(await page.evaluate(() => document.activeElement?.id)).toBe('part-counting')
    await tabTo(page, 'Queue', ({ name }) => name.trim() === 'Queue')
    await page.keyboard.press('Enter')
    await page.waitForURL(/\/jobs\/[0-9A-Z]{26}$/)

    const job = await finished(await signIn('researcher'), page.url().split('/').at(-1)!, 150_000)
    expect(job.spec.question).toMatchObject({ trials: 2000 })
    await expect.poll(() => page.getByRole('heading', { level: 1 }).innerText(), { timeout: 20_000 }).toContain('ns')
    await tabTo(page, 'a figure', ({ name }) => /distribution|survival|switch/i.test(name))
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })
})
