import { randomUUID } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { finished, signIn, submit, switchingSpec } from '../integration/harness'
import { NARROW, Visitor, useBrowser } from './visitor'

const browser = useBrowser()

describe('the list of jobs', () => {
  it('is searched, filtered, sorted, chosen from and acted upon by keyboard, and its address brings it back', async () => {
    const researcher = await signIn('researcher')
    const label = `cell W-${randomUUID().slice(0, 6)}`
    const spec = switchingSpec({ trials: 20 })
    const made = []
    for (const seed of [1, 2, 3]) made.push(await submit(researcher, { ...spec, device: { ...spec.device, label }, numerics: { seed } }))
    for (const job of made) await finished(researcher, job.id, 150_000)

    const visitor = await Visitor.open(browser(), { role: 'researcher' })
    const { page } = visitor
    await visitor.go('/jobs')
    const rows = page.locator('tbody').getByRole('row')
    await page.getByRole('searchbox').focus()
    await page.keyboard.type(label.toUpperCase().replace('CELL ', ''))
    await expect.poll(() => rows.count(), { timeout: 20_000 }).toBe(3)
    expect(new URL(page.url()).searchParams.get('q')).toContain('W-')
    await page.getByLabel('State', { exact: true }).selectOption('done')
    await expect.poll(() => new URL(page.url()).searchParams.get('state')).toBe('done')
    await page.getByRole('button', { name: 'CPU time' }).click()
    await expect.poll(() => page.getByRole('columnheader', { name: 'CPU time' }).getAttribute('aria-sort')).toBe('descending')
    const address = page.url()

    await rows.first().focus()
    await page.keyboard.press('Space')
    await page.keyboard.press('Shift+ArrowDown')
    await expect.poll(() => page.getByRole('group', { name: 'Selected jobs' }).innerText()).toContain('2 selected')
    await page.keyboard.press('d')
    const dialog = page.getByRole('dialog')
    await expect.poll(() => dialog.innerText()).toContain('Delete 2 jobs?')
    await dialog.getByRole('button', { name: 'Delete' }).press('Enter')
    await expect.poll(() => rows.count(), { timeout: 20_000 }).toBe(1)
    expect(await page.getByRole('status').allInnerTexts()).toContain('2 jobs deleted.')

    await rows.first().focus()
    await page.keyboard.press('r')
    await page.getByRole('dialog').getByRole('button', { name: 'Run again' }).press('Enter')
    await expect.poll(() => rows.first().innerText(), { timeout: 20_000 }).toContain('queued again')
    await rows.first().focus()
    await page.keyboard.press('Enter')
    await page.waitForURL(/\/jobs\/[0-9A-Z]{26}$/)
    await page.goBack()
    await page.waitForURL(address)
    await expect.poll(() => page.getByRole('searchbox').inputValue()).toContain('W-')
    expect(await page.getByLabel('State', { exact: true }).inputValue()).toBe('done')

    await visitor.go('/jobs?q=no-such-word')
    expect(await page.locator('main').innerText()).toContain('No job is like this.')
    await page.getByRole('button', { name: 'Show all jobs' }).press('Enter')
    await expect.poll(() => rows.count(), { timeout: 20_000 }).toBeGreaterThan(1)
    expect(await visitor.accessibilityFaults()).toEqual([])
    await page.setViewportSize(NARROW)
    expect(await visitor.sidewaysScroll()).toBe(0)
    expect(visitor.faults).toEqual([])
    await visitor.close()
  })
})
