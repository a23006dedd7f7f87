import { readFileSync } from 'node:fs'
import type { Page } from 'playwright-core'
import { describe, expect, it } from 'vitest'
import { jobListSchema } from '#shared/schemas/jobList'
import { finished, signIn } from '../integration/harness'
import { Visitor, useBrowser } from './visitor'

const browser = useBrowser()

async function download(page: Page, click: () => Promise<void>): Promise<string> {
  const [file] = await Promise.all([page.waitForEvent('download'), click()])
  return readFileSync(await file.path(), 'utf8')
}

describe('a researcher', () => {
  it('signs in, asks on the bench, watches the job run and takes the answer away', async () => {
    const visitor = await Visitor.open(browser())
    const { page } = visitor
    await visitor.signInByForm('researcher')
    await page.waitForURL('**/bench')
    await visitor.settle()

    const sentence = page.getByRole('heading', { level: 1 })
    const live = page.getByRole('region', { name: 'Switching, live' })
    await expect.poll(() => live.innerText(), { timeout: 20_000 }).toMatch(/crosses at|stays/)
    const before = await live.innerText()

    const damping = page.getByLabel('Damping', { exact: false }).first()
    await damping.fill('0.02')
    await expect.poll(() => live.innerText(), { timeout: 20_000 }).not.toBe(before)

    await damping.fill('a lot')
    await expect.poll(() => page.getByRole('status').allInnerTexts().then(texts => texts.join(' '))).toContain('needs mending')
    expect(await damping.inputValue()).toBe('a lot')
    await damping.fill('0.02')

    await page.locator('#part-counting').click()
    await page.getByLabel('Trials').fill('30 000')
    await expect.poll(() => sentence.innerText()).toMatch(/30.?000 trials/)
    const asked = (await sentence.innerText()).replace(/\s+/g, ' ').trim()
    await page.getByRole('button', { name: 'Queue' }).click()
    await page.waitForURL(/\/jobs\/[0-9A-Z]{26}$/)
    const id = page.url().split('/').at(-1)!
    expect((await page.title()).replace(/\s+/g, ' ')).toContain(asked)

    const researcher = await signIn('researcher')
    const job = await finished(researcher, id, 150_000)
    expect(job.state).toBe('done')
    expect(job.spec.device.damping).toBe(0.02)
    expect(job.spec.question).toMatchObject({ kind: 'switching', trials: 30_000 })
    // The page learns of it by the event stream, without being loaded again.
    const heading = async () => (await page.getByRole('heading', { level: 1 }).innerText()).replace(/\s/g, ' ')
    await expect.poll(heading, { timeout: 20_000 }).toBe(job.headline!.replace(/\s/g, ' '))

    const json = await download(page, () => page.getByRole('link', { name: 'JSON', exact: true }).click())
    expect(JSON.parse(json)).toMatchObject({ answer: { kind: 'switching', trials: 30_000, complete: true } })
    const csv = await download(page, () => page.getByRole('link', { name: 'CSV: switching time of every trial' }).click())
    expect(csv.trim().split(/\r\n/).length).toBe(30_001)
    const svg = await download(page, () => page.getByRole('button', { name: /^Download as SVG/ }).first().click())
    expect(svg).toMatch(/^<\?xml|^<svg/)
    expect(visitor.faults).toEqual([])
    await visitor.close()
  })

  it('sees a long job advance, cancels it, runs it again with changes and deletes it', async () => {
    const visitor = await Visitor.open(browser(), { role: 'researcher' })
    const { page } = visitor
    await visitor.go('/bench')
    await page.locator('#part-counting').click()
    await page.getByLabel('Trials').fill('900000')
    await page.getByRole('button', { name: 'Queue' }).click()
    await page.waitForURL(/\/jobs\/[0-9A-Z]{26}$/)
    const id = page.url().split('/').at(-1)!
    await expect.poll(() => page.locator('main').innerText(), { timeout: 90_000 }).toMatch(/Running: \d+ % done/)
    await page.getByRole('button', { name: 'Cancel' }).click()
    await expect.poll(() => page.locator('main').innerText(), { timeout: 10_000 }).toContain('It was cancelled')

    await page.getByRole('link', { name: 'Run again with changes' }).click()
    await page.waitForURL(/\/bench/)
    await expect.poll(() => page.getByRole('heading', { level: 1 }).innerText(), { timeout: 10_000 }).toMatch(/900.?000 trials/)

    await visitor.go(`/jobs/${id}`)
    await page.getByRole('button', { name: 'Delete' }).click()
    await page.getByRole('dialog').getByRole('button', { name: 'Delete' }).click()
    await page.waitForURL('**/jobs')
    const researcher = await signIn('researcher')
    expect((await researcher.get(`/api/jobs/${id}`)).status).toBe(404)
    expect(visitor.faults).toEqual([])
    await visitor.close()
  })

  it('plays the paths of a finished motion job and reads them from the keyboard', async () => {
    const researcher = await signIn('researcher')
    const list = jobListSchema.parse(await (await researcher.get('/api/jobs')).json())
    const motion = list.jobs.find(job => job.question === 'motion')!
    await finished(researcher, motion.id, 150_000)
    const visitor = await Visitor.open(browser(), { role: 'researcher' })
    const { page } = visitor
    await visitor.go(`/jobs/${motion.id}`)
    await page.locator('canvas').first().waitFor({ timeout: 60_000 })
    const scrub = page.getByRole('slider').first()
    const at = await scrub.inputValue()
    await scrub.focus()
    await page.keyboard.press('Home')
    await page.keyboard.press('ArrowRight')
    expect(await scrub.inputValue()).not.toBe(at)
    await page.getByRole('button', { name: /^Table of/ }).first().click()
    expect(await page.getByRole('region', { name: /^Table of/ }).getByRole('row').count()).toBeGreaterThan(5)
    expect(visitor.faults).toEqual([])
    await visitor.close()
  })
})
