import nodemailer from 'nodemailer'
import { describe, expect, it } from 'vitest'
import { readMail } from '../../server/launch/readMail'
import { messageIdOf, waitSeconds } from '../../server/mail/deliver'
import { letterSchema } from '../../server/mail/letters'
import type { Letter, LetterKind } from '../../server/mail/letters'
import { render } from '../../server/mail/render'
import { crossedLevel } from '../../server/models/quotaMail'

const BASE = 'https://bits.example.org'
const EVIL = '<script>alert(1)</script> & "Iris"\r\nBcc: all@example.org\u2028X-Evil: 1'
const use = { name: EVIL, limitCpuSeconds: 72_000, chargedCpuSeconds: 57_600, reservedCpuSeconds: 60, windowDays: 30 }
const about = { name: EVIL, jobId: '01ABCDEFGHJKMNPQRSTVWXYZ01', sentence: `How fast does ${EVIL} switch?` }
const LETTERS: { [K in LetterKind]: Extract<Letter, { kind: K }> } = {
  invitation: { kind: 'invitation', token: 'tok_en-1', team: EVIL, role: 'student', invitedBy: EVIL, expiresAt: '2026-03-04T05:06:07.000Z' },
  reset: { kind: 'reset', token: 'tok_en-1', name: EVIL, validMinutes: 60 },
  jobFinished: { kind: 'jobFinished', ...about, headline: 'Mean 2.1 ns', detail: '± 0.1 ns', cautions: [EVIL, 'Confirm by measurement.'], cpuSeconds: 12 },
  jobFailed: { kind: 'jobFailed', ...about, reason: EVIL },
  quota80: { kind: 'quota80', ...use },
  quota100: { kind: 'quota100', ...use },
}
const kinds = Object.keys(LETTERS) as LetterKind[]

describe.each(kinds)('a mail of kind %s', (kind) => {
  const letter = letterSchema.parse(JSON.parse(JSON.stringify(LETTERS[kind])))
  const { subject, text, html } = render(letter, BASE)

  it('has a subject of one line, whatever names hold', () => {
    expect(subject).not.toMatch(/[\p{Cc}\p{Zl}\p{Zp}]/u)
    expect(subject.length).toBeGreaterThan(5)
    expect(subject.length).toBeLessThanOrEqual(180)
  })

  it('says the same as text and as HTML, where names are inert', () => {
    expect(html).not.toMatch(/<script|on\w+=/i)
    expect(html).toMatch(/<html lang="en">/)
    expect(html).not.toMatch(/src=|url\(|https?:\/\/(?!bits\.example\.org)/)
    const visible = html.replace(/<[^>]+>/g, ' ')
    for (const word of text.replace(/https:\S+/g, '').match(/[a-z]{5,}/g) ?? []) expect(visible).toContain(word)
  })

  it('leads to the installation alone', () => {
    for (const [address] of text.matchAll(/https?:\/\/\S+/g)) expect(address.startsWith(`${BASE}/`) || address === BASE).toBe(true)
    expect(text.match(/https:/g)!.length).toBeGreaterThan(1)
  })

  it('comes out of a mail program as it went in, without a header of its own making', async () => {
    const composer = nodemailer.createTransport({ streamTransport: true, buffer: true })
    const { message } = await composer.sendMail({ from: { name: 'Farpole', address: 'farpole@example.org' }, to: { name: '', address: 'iris@example.org' }, subject, text, html })
    const bytes = Buffer.from(message as Buffer)
    const head = bytes.toString('latin1').split('\r\n\r\n')[0]!
    expect(head).not.toMatch(/^(bcc|x-evil):/im)
    expect(head.match(/^to:.*$/gim)).toEqual(['To: iris@example.org'])
    expect(readMail(bytes)).toEqual({ subject, text: text.replace(/\r\n/g, '\n'), html: html.replace(/\r\n/g, '\n') })
  })
})

it('a finished job’s mail has its sentence as the subject and its cautions beside the numbers', () => {
  const { subject, text } = render({ ...LETTERS.jobFinished, sentence: 'How fast does cell Q-28 switch?', cautions: ['Mind the size.'] }, BASE)
  expect(subject).toBe('Done: How fast does cell Q-28 switch?')
  expect(text).toMatch(/Mean 2\.1 ns[\s\S]*With these numbers, mind:\n- Mind the size\.[\s\S]*\/jobs\/01ABC/)
})

it('links carry their token where no server logs it', () => {
  expect(render(LETTERS.invitation, BASE).text).toContain(`${BASE}/join#token=tok_en-1`)
  expect(render(LETTERS.reset, BASE).text).toContain(`${BASE}/reset#token=tok_en-1`)
})

describe('sending', () => {
  it('names a mail alike at every attempt, and waits longer after each', () => {
    expect(messageIdOf('01ABC', BASE)).toBe('<01abc@bits.example.org>')
    expect(messageIdOf('01ABC', 'http://[::1]:4870')).toBe('<01abc@::1>')
    const waits = Array.from({ length: 20 }, (_, k) => waitSeconds(k + 1))
    expect(waits.slice(0, 4)).toEqual([15, 30, 60, 120])
    expect(Math.max(...waits)).toBe(7200)
    expect(waits.reduce((sum, wait) => sum + wait, 0)).toBeGreaterThan(20 * 3600)
  })
})

describe('the level of a quota that use has crossed', () => {
  it.each([
    [79, 100, 80, 100, 80], [80, 100, 81, 100, undefined], [79, 100, 79.9, 100, undefined], [10, 100, 100, 100, 100], [85, 100, 120, 100, 100], [100, 100, 101, 100, undefined],
    [50, 100, 50, 60, 80], [50, 100, 50, 50, 100], [90, 100, 90, 200, undefined], [0, 100, 0, 0, undefined], [0, 0, 0, 100, undefined], [90, 0, 90, 100, undefined],
  ])('from %d of %d to %d of %d is %s', (charged, limit, chargedAfter, limitAfter, level) => {
    expect(crossedLevel({ charged, limit }, { charged: chargedAfter, limit: limitAfter })).toBe(level)
  })
})
