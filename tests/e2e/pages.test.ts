import { beforeAll, describe, expect, it } from 'vitest'
import type { Role } from '#shared/schemas/api'
import { jobListSchema } from '#shared/schemas/jobList'
import { presetListSchema } from '#shared/schemas/presets'
import { finished, signIn, submit, switchingSpec } from '../integration/harness'
import type { Theme } from './visitor'
import { NARROW, Visitor, WIDE, useBrowser } from './visitor'

const browser = useBrowser()
const ids = { motion: '', switching: '', failure: '', cancelled: '', own: '' }

beforeAll(async () => {
  const researcher = await signIn('researcher')
  const { jobs } = jobListSchema.parse(await (await researcher.get('/api/jobs')).json())
  for (const kind of ['motion', 'switching', 'failure'] as const) {
    ids[kind] = jobs.find(job => job.question === kind && !['cancelled', 'failed'].includes(job.state))!.id
    await finished(researcher, ids[kind], 150_000)
  }
  const job = await submit(researcher, switchingSpec({ trials: 900_000, seed: 5 }))
  await researcher.post(`/api/jobs/${job.id}/cancel`)
  ids.cancelled = job.id
  ids.own = presetListSchema.parse(await (await researcher.get('/api/presets')).json()).presets.find(preset => preset.own)!.id
}, 300_000)

const PAGES: readonly { name: string, path: () => string, role?: Role }[] = [
  { name: 'sign-in', path: () => '/signin' },
  { name: 'forgotten password', path: () => '/forgot' },
  { name: 'invitation without its link', path: () => '/join' },
  { name: 'new password', path: () => '/reset#token=aReset-Link_that-nobody-was-sent' },
  { name: 'bench', path: () => '/bench', role: 'researcher' },
  { name: 'bench of a student', path: () => '/bench', role: 'student' },
  { name: 'jobs', path: () => '/jobs', role: 'researcher' },
  { name: 'answer: how fast', path: () => `/jobs/${ids.switching}`, role: 'researcher' },
  { name: 'answer: how often it fails', path: () => `/jobs/${ids.failure}`, role: 'student' },
  { name: 'answer: how it moves', path: () => `/jobs/${ids.motion}`, role: 'student' },
  { name: 'a cancelled job', path: () => `/jobs/${ids.cancelled}`, role: 'researcher' },
  { name: 'presets', path: () => '/presets?archived=1', role: 'researcher' },
  { name: 'a preset of one’s own', path: () => `/presets/${ids.own}`, role: 'researcher' },
  { name: 'a preset to read', path: () => `/presets/${ids.own}`, role: 'student' },
  { name: 'answers', path: () => '/home', role: 'student' },
  { name: 'methods', path: () => '/methods', role: 'student' },
  { name: 'people', path: () => '/people', role: 'admin' },
  { name: 'own account', path: () => '/profile', role: 'researcher' },
  { name: 'caught mail', path: () => '/demo-mail', role: 'student' },
]

describe.each(PAGES)('the page $name', ({ path, role }) => {
  it.each<[Theme, string, typeof WIDE | typeof NARROW]>([['paper', 'a desk', WIDE], ['night', 'a phone', NARROW]])('passes the accessibility check in the %s theme on %s, fits it, and has no word in the console', async (theme, _, viewport) => {
    const visitor = await Visitor.open(browser(), { role, theme, viewport })
    await visitor.go(path())
    await visitor.page.waitForTimeout(500)
    expect(await visitor.sidewaysScroll()).toBe(0)
    expect(await visitor.accessibilityFaults()).toEqual([])
    expect(await visitor.page.title()).not.toBe('')
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })
})

describe('the accessibility check', () => {
  it('finds a small target, a faint text and an unnamed control where there are such', async () => {
    const visitor = await Visitor.open(browser())
    await visitor.go('/signin')
    await visitor.page.evaluate(() => {
      const main = document.querySelector('main')!
      main.insertAdjacentHTML('beforeend', '<p style="color:#ccc;background:#fff">faint</p><button style="width:9px;height:9px;padding:0"></button><button style="width:9px;height:9px;padding:0">x</button>')
    })
    const rules = (await visitor.accessibilityFaults()).map(fault => fault.split(':')[0])
    for (const rule of ['color-contrast', 'button-name', 'target-size']) expect(rules).toContain(rule)
    await visitor.close()
  })
})

describe('the forms of the bench', () => {
  it.each(['question', 'device', 'direction', 'drive', 'environment', 'counting'])('pass the accessibility check: %s', async (part) => {
    const visitor = await Visitor.open(browser(), { role: 'researcher' })
    await visitor.go('/bench')
    const control = visitor.page.locator(`#part-${part}`)
    if (await control.getAttribute('aria-expanded') !== 'true') await control.click()
    await expect.poll(() => control.getAttribute('aria-expanded')).toBe('true')
    expect(await visitor.accessibilityFaults()).toEqual([])
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })
})
