import type { Request } from 'playwright-core'
import { describe, expect, it } from 'vitest'
import { finished, signIn, submit, switchingSpec } from '../integration/harness'
import { Visitor, useBrowser } from './visitor'

const browser = useBrowser()
const isStream = (request: Request) => new URL(request.url()).pathname === '/api/events'

describe('two tabs of one browser', () => {
  it('share one event stream, which passes on when its tab closes', async () => {
    const visitor = await Visitor.open(browser(), { role: 'researcher' })
    const { context, page: first } = visitor
    const streams = new Set<Request>()
    let asked = 0
    context.on('request', (request) => {
      if (!isStream(request)) return
      asked++
      streams.add(request)
    })
    context.on('requestfinished', request => streams.delete(request))
    context.on('requestfailed', request => streams.delete(request))
    await visitor.go('/jobs')
    const second = await context.newPage()
    await second.goto('/jobs')
    await expect.poll(() => asked).toBe(1)
    await second.waitForTimeout(1_500)
    expect(asked).toBe(1)

    const researcher = await signIn('researcher')
    const job = await submit(researcher, switchingSpec({ trials: 50, seed: 31 }))
    await finished(researcher, job.id)
    for (const page of [first, second]) {
      await expect.poll(() => page.locator(`a[href="/jobs/${job.id}"]`).count(), { timeout: 15_000 }).toBeGreaterThan(0)
    }

    await first.close()
    await expect.poll(() => asked, { timeout: 15_000 }).toBe(2)
    const next = await submit(researcher, switchingSpec({ trials: 50, seed: 32 }))
    await expect.poll(() => second.locator(`a[href="/jobs/${next.id}"]`).count(), { timeout: 15_000 }).toBeGreaterThan(0)
    expect([...streams].filter(stream => stream.frame().page() === second)).toHaveLength(1)
    await visitor.close()
    expect(visitor.faults).toEqual([])
  })

  it('are both signed out when one is', async () => {
    const visitor = await Visitor.open(browser())
    const { context, page } = visitor
    await visitor.signInByForm('researcher')
    await visitor.settle()
    const other = await context.newPage()
    await other.goto('/presets')
    await other.waitForTimeout(2_000)
    await page.getByRole('button', { name: 'Sign out' }).click()
    await page.waitForURL('**/signin')
    await other.waitForURL(/\/signin\?next=\/presets/, { timeout: 15_000 })
    await visitor.close()
  })
})
