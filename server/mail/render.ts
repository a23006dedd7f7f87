import type { Role } from '#shared/schemas/api'
import { formatDuration } from '#shared/utils/format'
import type { Letter } from './letters'

/** A mail ready to be sent but for its addresses. */
export interface Rendered { subject: string, text: string, html: string }

const LONGEST_SUBJECT = 180
const ROLE_WORDS: Record<Role, string> = { researcher: 'a researcher', student: 'a student', admin: 'an admin' }

/** What a mail is made of, from which both of its forms follow. */
type Block = { text: string } | { strong: string } | { link: string, label: string } | { list: string[], title: string }
interface Content { subject: string, blocks: Block[] }

/** The text and the HTML form of a letter. Links lead to `baseUrl`, never to where a request came from. */
export function render(letter: Letter, baseUrl: string): Rendered {
  const { subject, blocks } = contentOf(letter, path => baseUrl + path)
  const foot = letter.kind === 'jobFinished' || letter.kind === 'jobFailed'
    ? `You get a mail when a job of yours ends. Choose which mails you want at ${baseUrl}/profile`
    : `Sent by Farpole at ${baseUrl}`
  return { subject: oneLine(subject), text: `${blocks.map(asText).join('\n\n')}\n\n-- \n${foot}\n`, html: page(subject, blocks, foot) }
}

function contentOf(letter: Letter, at: (path: string) => string): Content {
  switch (letter.kind) {
    case 'invitation': return {
      subject: `${letter.invitedBy} invites you to ${letter.team} on Farpole`,
      blocks: [
        { text: `${letter.invitedBy} invites you to join ${letter.team} as ${ROLE_WORDS[letter.role]}. The team works on spin-torque memory: it asks how cells move and how fast they switch, and keeps the answers here.` },
        { link: at(`/join#token=${letter.token}`), label: 'Choose a name and a password' },
        { text: `The link works once, for this address alone, until ${dayOf(letter.expiresAt)}. If you did not expect it, leave it: nothing happens without it.` },
      ],
    }
    case 'reset': return {
      subject: 'A new password for Farpole',
      blocks: [
        { text: `Hello ${letter.name}, somebody asked for a new password for your account, most likely you.` },
        { link: at(`/reset#token=${letter.token}`), label: 'Choose a new password' },
        { text: `The link works once, within ${letter.validMinutes} minutes; a newer one takes its place. Your present password stays until then. If it was not you, leave it.` },
      ],
    }
    case 'jobFinished': return {
      subject: `Done: ${letter.sentence}`,
      blocks: [
        { text: letter.sentence },
        { strong: letter.headline },
        { text: letter.detail },
        ...(letter.cautions.length > 0 ? [{ title: 'With these numbers, mind:', list: letter.cautions }] : []),
        { text: `It took ${formatDuration(letter.cpuSeconds)} of CPU.` },
        { link: at(`/jobs/${letter.jobId}`), label: 'See the whole answer' },
      ],
    }
    case 'jobFailed': return {
      subject: `Failed: ${letter.sentence}`,
      blocks: [
        { text: letter.sentence },
        { strong: 'This job ended without an answer.' },
        { text: letter.reason },
        { link: at(`/jobs/${letter.jobId}`), label: 'See the job' },
      ],
    }
    case 'quota80': return {
      subject: 'You have used 80 % of your CPU time',
      blocks: [
        { text: `Hello ${letter.name}, ${useWords(letter)}` },
        { text: `Jobs are accepted while their price fits into what is left. What was used comes back ${letter.windowDays} days later; an admin of your team can change the quota.` },
        { link: at('/profile'), label: 'See what it was used for' },
      ],
    }
    case 'quota100': return {
      subject: 'Your CPU time is used up',
      blocks: [
        { text: `Hello ${letter.name}, ${useWords(letter)}` },
        { text: `No new job is accepted until use of ${letter.windowDays} days ago comes back or an admin of your team raises the quota. Jobs that wait or run go on.` },
        { link: at('/profile'), label: 'See what it was used for' },
      ],
    }
  }
}

function useWords({ limitCpuSeconds, chargedCpuSeconds, reservedCpuSeconds, windowDays }: Extract<Letter, { kind: 'quota80' | 'quota100' }>): string {
  const reserved = reservedCpuSeconds > 0 ? `, and ${formatDuration(reservedCpuSeconds)} are reserved for jobs that wait or run` : ''
  return `your jobs have used ${formatDuration(chargedCpuSeconds)} of the ${formatDuration(limitCpuSeconds)} of CPU time that you may use in ${windowDays} days${reserved}.`
}

const dayOf = (instant: string): string => `${new Intl.DateTimeFormat('en-GB', { dateStyle: 'long', timeStyle: 'short', timeZone: 'UTC' }).format(new Date(instant))} UTC`

/** A header is one line of limited length, whatever a name or a sentence holds. */
function oneLine(text: string): string {
  const line = text.replace(/[\p{Cc}\p{Zl}\p{Zp}]+/gu, ' ').trim()
  return line.length <= LONGEST_SUBJECT ? line : `${line.slice(0, LONGEST_SUBJECT - 1).trimEnd()}…`
}

function asText(block: Block): string {
  if ('link' in block) return `${block.label}:\n${block.link}`
  if ('list' in block) return `${block.title}\n${block.list.map(item => `- ${item}`).join('\n')}`
  return 'strong' in block ? block.strong : block.text
}

const ESCAPES: Record<string, string> = { '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;', '\'': '&#39;' }
const escape = (text: string): string => text.replace(/[&<>"']/g, sign => ESCAPES[sign]!)

function asHtml(block: Block): string {
  if ('link' in block) return `<p><a href="${escape(block.link)}" target="_blank" rel="noreferrer" style="color:#6d2b63">${escape(block.label)}</a></p>`
  if ('list' in block) return `<p>${escape(block.title)}</p><ul>${block.list.map(item => `<li>${escape(item)}</li>`).join('')}</ul>`
  return 'strong' in block ? `<p><strong>${escape(block.strong)}</strong></p>` : `<p>${escape(block.text)}</p>`
}

const page = (subject: string, blocks: readonly Block[], foot: string): string => `<!DOCTYPE html>
<html lang="en"><head><meta charset="utf-8"><title>${escape(oneLine(subject))}</title></head>
<body style="margin:0;padding:24px;background:#faf7f0;color:#221f1a;font:15px/1.6 'JetBrains Mono',Menlo,Consolas,monospace">
<div style="max-width:38em">
${blocks.map(asHtml).join('\n')}
<p style="border-top:1px solid #b9b0a0;padding-top:12px;color:#5a5348">${escape(foot)}</p>
</div></body></html>
`
