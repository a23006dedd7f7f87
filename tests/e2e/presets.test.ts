import { describe, expect, it } from 'vitest'
import { presetSchema } from '#shared/schemas/presets'
import type { Client } from '../integration/harness'
import { readJob, signIn, switchingSpec } from '../integration/harness'
import { Visitor, useBrowser } from './visitor'

const browser = useBrowser()
const { device } = switchingSpec()

const make = async (client: Client, name: string) =>
  presetSchema.parse(await (await client.post('/api/presets', { name, content: { device: { ...device, label: name } } })).json())

describe('a preset', () => {
  it('is pinned by the bench, over a reload, saved as its next version there, and named by the job', async () => {
    const researcher = await signIn('researcher')
    const preset = await make(researcher, 'P-40')
    const visitor = await Visitor.open(browser(), { role: 'researcher' })
    const { page } = visitor
    await visitor.go(`/bench?preset=${preset.id}`)
    const foot = page.locator('footer')
    await expect.poll(() => foot.innerText()).toContain('preset P-40 v1')
    expect(await foot.innerText()).not.toContain('changed')
    await page.getByLabel('Damping').first().fill('0.06')
    await expect.poll(() => foot.innerText()).toContain('preset P-40 v1 · changed')
    await page.waitForTimeout(500)
    await page.reload()
    await visitor.settle()
    await expect.poll(() => foot.innerText()).toContain('preset P-40 v1 · changed')
    expect(await page.getByLabel('Damping').first().inputValue()).toBe('0.06')

    await page.getByRole('button', { name: 'Save preset' }).click()
    const dialog = page.getByRole('dialog')
    expect(await dialog.getByLabel('as version 2 of P-40').isChecked()).toBe(true)
    await dialog.getByRole('button', { name: 'Save as version 2' }).click()
    await expect.poll(() => foot.innerText()).toContain('preset P-40 v2')
    expect(await foot.innerText()).not.toContain('changed')

    await page.locator('#part-counting').click()
    await page.getByLabel('Trials').fill('50')
    await page.getByRole('button', { name: 'Queue' }).click()
    await page.waitForURL(/\/jobs\/[0-9A-Z]{26}$/)
    const job = await readJob(researcher, page.url().split('/').at(-1)!)
    expect(job.preset).toEqual({ id: preset.id, name: 'P-40', version: 2, changed: false })
    await expect.poll(() => page.locator('main').innerText()).toContain('preset P-40 v2')
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })

  it('is edited in versions; of two edits at once both are shown and nothing typed is lost', async () => {
    const researcher = await signIn('researcher')
    // A name of its own, should the test be tried twice.
    const name = `P-41 ${Date.now() % 100_000}`
    const preset = await make(researcher, name)
    const visitor = await Visitor.open(browser(), { role: 'researcher' })
    const { page } = visitor
    await visitor.go(`/presets?q=${encodeURIComponent(name)}`)
    await page.getByRole('link', { name: `Edit ${name}` }).click()
    await page.waitForURL(`**/presets/${preset.id}`)
    await page.getByRole('textbox', { name: /^Thickness/ }).fill('16 Å')
    await expect.poll(() => page.locator('footer').innerText()).toContain('One field differs from version 1')
    const other = await researcher.patch(`/api/presets/${preset.id}`, { content: { device: { ...device, label: name, damping: 0.09 } }, note: 'from elsewhere' }, { 'If-Match': '"1"' })
    expect(other.status).toBe(200)
    await page.getByRole('button', { name: 'Save as version 2' }).click()
    const conflict = page.getByRole('region', { name: 'It has become version 2 since you began' }).first()
    await expect.poll(() => conflict.innerText()).toMatch(/Damping\s+0\.05\s+0\.09\s+0\.05/)
    expect(await conflict.innerText()).toMatch(/Thickness\s+15.Å\s+15.Å\s+16.Å/)
    expect(await page.getByRole('textbox', { name: /^Thickness/ }).inputValue()).toBe('16 Å')

    await page.waitForTimeout(500)
    await page.reload()
    await visitor.settle()
    await expect.poll(() => page.getByRole('textbox', { name: /^Thickness/ }).inputValue()).toBe('16 Å')
    await page.getByRole('button', { name: 'Save mine as version 3' }).click()
    await expect.poll(() => page.getByRole('heading', { level: 1 }).innerText()).toBe(`${name}, version 3`)
    const now = presetSchema.parse(await (await researcher.get(`/api/presets/${preset.id}`)).json())
    expect(now.content.device).toMatchObject({ thickness: 1.6e-9, damping: 0.05 })

    await page.getByRole('button', { name: 'Save what version 2 said as a new version' }).click()
    await expect.poll(() => page.getByRole('heading', { level: 1 }).innerText()).toBe(`${name}, version 4`)
    expect(await page.getByLabel('Damping').first().inputValue()).toBe('0.09')
    await page.getByRole('button', { name: 'Keep it private' }).click()
    await expect.poll(() => page.locator('main').innerText()).toContain('you alone see it')
    await page.getByRole('button', { name: 'Archive' }).click()
    await expect.poll(() => page.locator('main').innerText()).toContain('archived')
    await visitor.go('/presets')
    expect(await page.locator('main').innerText()).not.toContain(name)
    await page.getByLabel('archived ones too').check()
    await expect.poll(() => page.locator('main').innerText()).toContain(name)
    await visitor.close()
    expect(visitor.faults.filter(fault => !fault.includes('412'))).toEqual([])
  })
})
