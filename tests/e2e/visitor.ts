import { existsSync } from 'node:fs'
import { join } from 'node:path'
import AxeBuilder from '@axe-core/playwright'
import type { Browser, BrowserContext, Page } from 'playwright-core'
import { chromium } from 'playwright-core'
import { afterAll, afterEach, beforeAll } from 'vitest'
import type { Role } from '#shared/schemas/api'
import { account, signIn, theStack, waitFor } from '../integration/harness'

export type Theme = 'paper' | 'night'
export const WIDE = { width: 1440, height: 1000 } as const
export const NARROW = { width: 390, height: 844 } as const

/** Words of the browser itself about its software renderer, no fault of the page's. */
const RENDERER_WORDS = /GL Driver Message|GPU stall|Automatic fallback to software WebGL|software WebGL has been deprecated/

function executable(): string {
  const found = ['/usr/bin/chromium', '/usr/bin/chromium-browser'].find(path => existsSync(path))
  if (!found) throw new Error('Chromium is not on this machine: npm test installs it.')
  return found
}

/** Visitors of the test that is running. */
const present = new Set<Visitor>()

/** One browser for the tests of a file. A failed test leaves pictures of its pages in the log directory. */
export function useBrowser(): () => Browser {
  let browser: Browser | undefined
  afterEach(async ({ task }) => {
    for (const visitor of [...present]) {
      if (task.result?.state === 'fail') {
        const picture = join(theStack().logDirectory, `${task.name.replace(/[^\w]+/g, '-').slice(0, 80)}.png`)
        await visitor.page.screenshot({ path: picture }).catch(() => undefined)
        console.log(`${visitor.page.url()} is pictured in ${picture}\n${visitor.faults.join('\n')}`)
      }
      await visitor.close()
    }
  })
  beforeAll(async () => {
    browser = await chromium.launch({
      executablePath: executable(),
      args: [
        ...(process.getuid?.() === 0 ? ['--no-sandbox'] : []),
        '--use-angle=swiftshader', '--enable-unsafe-swiftshader', '--disable-quic', '--no-first-run', '--disable-background-networking',
        '--disable-component-update', '--disable-sync', '--disable-dev-shm-usage',
      ],
    })
  })
  afterAll(() => browser?.close())
  return () => {
    if (!browser) throw new Error('The browser is not open yet.')
    return browser
  }
}

/** Someone at the portal, and everything that went wrong in their browser: console errors and warnings, exceptions, failed requests. */
export class Visitor {
  readonly faults: string[] = []

  private constructor(readonly context: BrowserContext, readonly page: Page) {
    page.on('console', (message) => {
      const text = message.text()
      if ((message.type() === 'error' || message.type() === 'warning') && !RENDERER_WORDS.test(text)) this.faults.push(`${message.type()}: ${text}`)
    })
    page.on('pageerror', error => this.faults.push(`exception: ${error.message}`))
    page.on('response', response => response.status() >= 500 && this.faults.push(`${response.status()} from ${response.url()}`))
  }

  /** Opens a context of its own; signed in as a role, or by an address with the demo's password, when one is given. */
  static async open(browser: Browser, { role, as = role, theme, viewport = WIDE }: { role?: Role, as?: Parameters<typeof signIn>[0], theme?: Theme, viewport?: { width: number, height: number } } = {}): Promise<Visitor> {
    const url = theStack().baseUrl
    const context = await browser.newContext({ baseURL: url, viewport, acceptDownloads: true, reducedMotion: 'reduce', timezoneId: 'Europe/Berlin', locale: 'en-GB' })
    context.setDefaultTimeout(30_000)
    if (theme) await context.addCookies([{ name: 'theme', value: theme, url }])
    if (as) {
      const { cookie } = await signIn(as)
      const [name = '', value = ''] = cookie.split(/=(.*)/s)
      await context.addCookies([{ name, value, url, httpOnly: true }])
    }
    const visitor = new Visitor(context, await context.newPage())
    present.add(visitor)
    return visitor
  }

  /** Opens a page and waits until it is drawn and quiet. */
  async go(path: string): Promise<void> {
    await this.page.goto(path, { waitUntil: 'load' })
    await this.settle()
  }

  /** Waits until scripts have taken over the page. */
  async settle(): Promise<void> {
    // Asked again and again from outside: the page's policy rightly forbids the evaluation that waitForFunction needs.
    await waitFor('the page to be taken over by its scripts', () => this.page.evaluate(() => {
      const root = document.querySelector('#__nuxt')
      const nuxt = 'useNuxtApp' in window && typeof window.useNuxtApp === 'function' ? window.useNuxtApp() : null
      return root !== null && '_vnode' in root && nuxt !== null && nuxt.isHydrating === false
    }), 30_000, 50)
    await this.page.waitForTimeout(300)
  }

  /** Signs in by the form, as a person does. */
  async signInByForm(role: Role): Promise<void> {
    const { email, password } = account(role)
    await this.go('/signin')
    await this.page.getByLabel('E-mail address').fill(email)
    await this.page.getByLabel('Password', { exact: true }).fill(password)
    await this.page.getByRole('button', { name: 'Sign in' }).click()
    await this.page.waitForURL(url => url.pathname !== '/signin')
  }

  /** What the automatic accessibility check finds on the page as it stands, in short. */
  async accessibilityFaults(): Promise<string[]> {
    const { violations } = await new AxeBuilder({ page: this.page })
      .options({ rules: { 'target-size': { enabled: true } } })
      .withTags(['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa', 'best-practice'])
      .analyze()
    return violations.flatMap(({ id, help, nodes }) => nodes.map(node => `${id}: ${help}: ${node.target.join(' ')}${node.failureSummary ? ` (${node.failureSummary.replace(/\s+/g, ' ').slice(0, 200)})` : ''}`))
  }

  /** How far the page can be scrolled sideways, px. */
  sidewaysScroll(): Promise<number> {
    return this.page.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth)
  }

  async close(): Promise<void> {
    present.delete(this)
    await this.context.close()
  }
}
