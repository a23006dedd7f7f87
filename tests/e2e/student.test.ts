import { describe, expect, it } from 'vitest'
import { presetListSchema } from '#shared/schemas/presets'
import { jobListSchema } from '#shared/schemas/jobList'
import { signIn, waitFor } from '../integration/harness'
import { Visitor, useBrowser } from './visitor'

const browser = useBrowser()

describe('a student', () => {
  it('reads the team’s answers and exports them, and finds no control that writes', async () => {
    const student = await signIn('student')
    const switching = async () => jobListSchema.parse(await (await student.get('/api/jobs?question=switching&state=done&limit=6')).json()).jobs.find(one => one.headline?.startsWith('It switches in'))
    const job = await waitFor('an answer with switching times', switching, 150_000, 500)

    const visitor = await Visitor.open(browser())
    const { page } = visitor
    await visitor.signInByForm('student')
    await page.waitForURL('**/home')
    await visitor.settle()
    const shown = page.getByRole('listitem').filter({ has: page.locator(`a[href="/jobs/${job.id}"]`) })
    await shown.scrollIntoViewIfNeeded()
    await expect.poll(() => shown.getByRole('img').getAttribute('aria-label'), { timeout: 20_000 }).toMatch(/When they switched.*trials crossed/s)
    await shown.getByRole('heading', { level: 3 }).getByRole('link').click()
    await page.waitForURL(`**/jobs/${job.id}`)
    await expect.poll(() => page.getByRole('heading', { level: 1 }).innerText()).toContain('ns')
    const [file] = await Promise.all([page.waitForEvent('download'), page.getByRole('link', { name: 'CSV: survival curve' }).click()])
    expect(file.suggestedFilename()).toMatch(/\.csv$/)

    const preset = presetListSchema.parse(await (await student.get('/api/presets')).json()).presets[0]!
    for (const path of ['/home', '/jobs', `/jobs/${job.id}`, '/bench', '/presets', `/presets/${preset.id}`]) {
      await visitor.go(path)
      const controls = await page.getByRole('button').or(page.getByRole('link')).allInnerTexts()
      expect(controls.filter(text => /queue|cancel|delete|archive\b|save|run again|ask something|private|share|newest again|undo|people/i.test(text)), path).toEqual([])
    }
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })

  it('plays on the bench, where the preview follows at no cost', async () => {
    const visitor = await Visitor.open(browser(), { role: 'student' })
    const { page } = visitor
    await visitor.go('/bench')
    const live = page.getByRole('region', { name: 'Switching, live' })
    await expect.poll(() => live.innerText(), { timeout: 20_000 }).toMatch(/crosses at|stays/)
    const before = await live.innerText()
    await page.getByLabel('Damping', { exact: false }).first().fill('0.03')
    await expect.poll(() => live.innerText(), { timeout: 20_000 }).not.toBe(before)
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })

  it('tries a cell with sliders on the page of answers', async () => {
    const visitor = await Visitor.open(browser(), { role: 'student' })
    const { page } = visitor
    await visitor.go('/home')
    const live = page.getByRole('region', { name: 'Try a cell' })
    await expect.poll(() => live.innerText(), { timeout: 20_000 }).toMatch(/crosses at|stays/)
    const before = await live.innerText()
    const current = live.getByRole('slider', { name: /^Current/ })
    await current.focus()
    await page.keyboard.press('Home')
    await expect.poll(() => live.innerText(), { timeout: 20_000 }).not.toBe(before)
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })

  it('may not see the people', async () => {
    const visitor = await Visitor.open(browser(), { role: 'student' })
    const { page } = visitor
    await page.goto('/people')
    expect(await page.locator('body').innerText()).toMatch(/role does not allow/i)
    await visitor.close()
  })
})
