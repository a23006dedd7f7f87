import { describe, expect, it } from 'vitest'
import { z } from 'zod'
import { ROLES } from '#shared/schemas/api'
import { invitationCreateSchema } from '#shared/schemas/accounts'
import { parseQuantity } from '#shared/utils/quantity'
import { fieldErrors } from '~/utils/fieldErrors'
import { isDeadLink, linkToken } from '~/utils/linkToken'
import { agentWords, countWords, nowWords, usedWords } from '~/utils/peopleWords'
import { ProblemError } from '~/utils/problem'
import { accountWords, cpuSecondsWords, quotaEntry, signedSeconds } from '~/utils/quotaEntry'
import { roleChangeWords } from '~/utils/roleWords'
import { textLinks } from '~/utils/textLinks'

const plain = (text: string) => text.replace(/[\u202F\u00A0]/g, ' ').replace(/\u2212/g, '-')
const refusal = (status: number, errors?: { pointer: string, detail: string }[], retryAfter: number | null = null) =>
  new ProblemError({ type: 'about:blank', title: 'Refused.', status, ...(errors ? { errors } : {}) }, retryAfter)

describe('the account of CPU time', () => {
  it.each([[12.3, 4, 3600], [0, 0, 0], [0.0004, 0.0004, 1], [1.0005, 2.0005, 10], [71_999.9995, 0.1239, 72_000], [12_345.6789, 2.3456, 72_000]])(
    'shows figures that add up: %d charged, %d reserved of %d', (charged, reserved, limit) => {
      const words = accountWords({ charged, reserved, limit })
      const number = (text: string) => Number(plain(text).replace(/ s$/, '').replace(/ /g, ''))
      expect(number(words.charged) + number(words.reserved)).toBeCloseTo(number(words.sum), 9)
      expect(number(words.sum)).toBeCloseTo(charged + reserved, 2)
    })

  it('writes no zeros that say nothing, and the sign of each entry', () => {
    const words = accountWords({ charged: 12.3, reserved: 4, limit: 3600 })
    expect(`charged ${plain(words.charged)} + reserved ${plain(words.reserved)} = ${plain(words.sum)} of ${plain(words.limit)}`)
      .toBe('charged 12.3 s + reserved 4 s = 16.3 s of 3600 s')
    expect([4.25, -4.25, 0, -0.0001].map(seconds => plain(signedSeconds(seconds)))).toEqual(['+4.25 s', '-4.25 s', '0 s', '0 s'])
  })

  it('offers a quota for editing in a unit that makes it short, and reads it back as the same', () => {
    expect(quotaEntry(72_000)).toEqual({ text: '20', unit: 'h' })
    expect(quotaEntry(5400)).toEqual({ text: '1.5', unit: 'h' })
    expect(quotaEntry(600)).toEqual({ text: '10', unit: 'min' })
    expect(quotaEntry(0)).toEqual({ text: '0', unit: 'h' })
    for (const seconds of [0, 0.5, 3.6, 59, 600, 3601, 72_000, 1e8]) {
      const { text, unit } = quotaEntry(seconds)
      expect(parseQuantity(text, 'cpu', unit)).toMatchObject({ ok: true, value: seconds })
    }
    expect(plain(cpuSecondsWords(72_000))).toBe('72 000 CPU-seconds')
  })
})

describe('words about people', () => {
  it('count them, their work and their use', () => {
    expect(countWords([{ state: 'active' }])).toBe('1 person')
    expect(countWords([{ state: 'active' }, { state: 'disabled' }])).toBe('2 people, 1 of them disabled')
    expect(nowWords({ runningChunks: 0, waitingJobs: 0 })).toBe('nothing')
    expect(nowWords({ runningChunks: 1, waitingJobs: 2 })).toBe('1 chunk runs, 2 jobs wait')
    expect(plain(usedWords({ charged: 30, reserved: 0 }))).toBe('30 s used')
    expect(plain(usedWords({ charged: 30, reserved: 60 }))).toBe('30 s used, 1 m reserved')
    expect(usedWords({ charged: 0, reserved: 0 })).toBe('nothing used')
  })

  it('say what follows from every change of role', () => {
    const changes = ROLES.flatMap(from => ROLES.filter(to => to !== from).map(to => roleChangeWords('Iris Vale', from, to)))
    for (const words of changes) expect(words).toMatch(/^Iris Vale .+\.$/)
    expect(roleChangeWords('Iris Vale', 'researcher', 'student')).toMatch(/queue, save and change nothing/)
    expect(roleChangeWords('Iris Vale', 'admin', 'researcher')).not.toBe(roleChangeWords('Iris Vale', 'student', 'researcher'))
  })

  it('name the browser of a session as far as it says so', () => {
    expect(agentWords('Mozilla/5.0 (X11; Linux x86_64) AppleWebKit/537.36 (KHTML, like Gecko) Chrome/140.0.0.0 Safari/537.36')).toBe('Chromium or Chrome on Linux')
    expect(agentWords('Mozilla/5.0 (iPhone; CPU iPhone OS 18_0 like Mac OS X) AppleWebKit/605.1.15 Version/18.0 Mobile/15E148 Safari/604.1')).toBe('Safari on iPhone')
    expect(agentWords('Mozilla/5.0 (Windows NT 10.0; rv:140.0) Gecko/20100101 Firefox/140.0')).toBe('Firefox on Windows')
    expect(agentWords('curl/8.5.0')).toBe('curl/8.5.0')
    expect(agentWords(' ')).toMatch(/no name/)
  })
})

describe('links of mails', () => {
  it('are found in a text of which nothing is lost, without the full stop behind them', () => {
    const text = 'Go to http://127.0.0.1:4870/join#token=ab_c-9, or ask.\nhttps://example.org/x?y=1.'
    const pieces = textLinks(text)
    expect(pieces.map(piece => piece.text).join('')).toBe(text)
    expect(pieces.filter(piece => piece.kind === 'link').map(piece => piece.text)).toEqual(['http://127.0.0.1:4870/join#token=ab_c-9', 'https://example.org/x?y=1'])
    expect(textLinks('javascript:alert(1) <b>')).toEqual([{ kind: 'text', text: 'javascript:alert(1) <b>' }])
    expect(textLinks('')).toEqual([])
  })

  it('carry a token behind the # sign, and nothing else is one', () => {
    expect(linkToken('#token=abcDEF_-0123456789')).toBe('abcDEF_-0123456789')
    for (const hash of ['', '#', '#token=', '#token=short', '#other=abcDEF_-0123456789', '#token=abcDEF<script>0123456789']) expect(linkToken(hash), hash).toBeNull()
  })

  it('are told apart from what was typed beside them', () => {
    expect(isDeadLink(refusal(410))).toBe(true)
    expect(isDeadLink(refusal(422, [{ pointer: '/token', detail: 'Too long.' }]))).toBe(true)
    expect(isDeadLink(refusal(422, [{ pointer: '/password', detail: 'Too short.' }]))).toBe(false)
    expect(isDeadLink(refusal(503))).toBe(false)
  })
})

describe('refusals of a form', () => {
  it('stand beside their fields, whether the server or the schema said them', () => {
    expect(fieldErrors(refusal(422, [{ pointer: '/email', detail: 'No.' }]), ['email', 'role'])).toEqual({ email: 'No.' })
    const { error } = invitationCreateSchema.safeParse({ email: 'nobody', role: 'student' })
    expect(fieldErrors(error, ['email', 'role'])).toEqual({ email: 'Enter an e-mail address.' })
  })

  it('are general where they name no field, with the time to wait', () => {
    expect(fieldErrors(refusal(409), ['email'])).toEqual({ general: 'Refused.' })
    expect(fieldErrors(refusal(429, undefined, 6.2), ['email'])).toEqual({ general: 'Refused. Try again in 7 s.' })
  })

  it('do not swallow faults', () => {
    const fault = new TypeError('broken')
    expect(() => fieldErrors(fault, ['email'])).toThrow(fault)
    expect(() => fieldErrors(z.string().safeParse(1).error, ['email'])).toThrow(z.ZodError)
  })
})
