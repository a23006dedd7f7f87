import { describe, expect, it } from 'vitest'
import { jobListSchema } from '#shared/schemas/jobList'
import { finished, signIn } from '../integration/harness'
import { Visitor, useBrowser } from './visitor'

const browser = useBrowser()

describe('a student', () => {
  it('reads the team’s answers and exports them, and finds no control that writes', async () => {
    const student = await signIn('student')
    const list = jobListSchema.parse(await (await student.get('/api/jobs')).json())
    const job = await finished(student, list.jobs.find(one => one.question === 'switching')!.id, 150_000)

    const visitor = await Visitor.open(browser())
    const { page } = visitor
    await visitor.signInByForm('student')
    await page.waitForURL('**/jobs')
    await visitor.settle()
    await page.getByRole('link', { name: job.sentence }).first().click()
    await page.waitForURL(`**/jobs/${job.id}`)
    await expect.poll(() => page.getByRole('heading', { level: 1 }).innerText()).toContain('ns')
    const [file] = await Promise.all([page.waitForEvent('download'), page.getByRole('link', { name: 'CSV: survival curve' }).click()])
    expect(file.suggestedFilename()).toMatch(/\.csv$/)

    for (const path of ['/jobs', `/jobs/${job.id}`, '/bench', '/presets']) {
      await visitor.go(path)
      const controls = await page.getByRole('button').or(page.getByRole('link')).allInnerTexts()
      expect(controls.filter(text => /queue|cancel|delete|archive|save|run again|ask something/i.test(text)), path).toEqual([])
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

  it('may not see the people', async () => {
    const visitor = await Visitor.open(browser(), { role: 'student' })
    const { page } = visitor
    await page.goto('/people')
    expect(await page.locator('body').innerText()).toMatch(/role does not allow/i)
    await visitor.close()
  })
})
