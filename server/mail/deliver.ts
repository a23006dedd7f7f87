import { randomUUID } from 'node:crypto'
import { Op, literal } from 'sequelize'
import type { Mail } from '../models/accounts'
import type { Database } from '../models/database'
import { NO_DATA } from '../models/outbox'
import { letterSchema } from './letters'
import { render } from './render'
import type { Rendered } from './render'
import type { Transport } from './transport'

const AT_ONCE = 20
/** Seconds after which an attempt counts as lost: more than any attempt may take. */
const LOST_SECONDS = 120
/** Waits between attempts: 15 s, doubling to at most 2 h; with these it goes on for about a day. */
const FIRST_WAIT_SECONDS = 15
const LONGEST_WAIT_SECONDS = 7200
const MOST_ATTEMPTS = 20
/** Attempts after the server has said for good that it does not take this mail: once more than a passing mistake needs. */
const MOST_REFUSALS = 3
const LONGEST_ERROR = 300
const KEPT_DAYS = 90

export interface MailOffice {
  transport: Transport
  /** Address that mails come from. */
  from: string
  /** Where the portal is, without a slash at the end. */
  baseUrl: string
}

/** What became of a round of sending. */
export interface Delivered { sent: number, postponed: number, givenUp: number }

/**
 * Sends the mails that are due, one after the other. Each is claimed in the database before the mail server hears of it
 * and marked after the server has taken it, so that however many processes do this, each mail is sent once. One case is
 * left, which no protocol can close: the server takes a mail and its word, or the process, is lost before the mark. The
 * mail is then sent again under the same Message-ID, by which mail programs know it for the same.
 */
export async function deliverDue(db: Database, office: MailOffice, stop: AbortSignal): Promise<Delivered> {
  const total: Delivered = { sent: 0, postponed: 0, givenUp: 0 }
  const due = await db.models.Mail.findAll({ where: DUE(), attributes: ['id'], order: [['nextAttemptAt', 'ASC']], limit: AT_ONCE })
  for (const { id } of due) {
    if (stop.aborted) break
    const mail = await claimMail(db, id)
    if (mail) total[await deliver(db, office, mail)]++
  }
  return total
}

const DUE = () => ({ state: ['waiting', 'sending'] as const satisfies readonly string[], nextAttemptAt: { [Op.lte]: literal('UTC_TIMESTAMP(3)') } })

async function claimMail(db: Database, id: string): Promise<Mail | null> {
  const claim = randomUUID()
  const [claimed] = await db.models.Mail.update({
    state: 'sending', claim, attempts: literal('attempts + 1'), nextAttemptAt: literal(`UTC_TIMESTAMP(3) + INTERVAL ${LOST_SECONDS} SECOND`),
  }, { where: { id, ...DUE() } })
  return claimed === 0 ? null : db.models.Mail.findOne({ where: { id, claim } })
}

async function deliver(db: Database, office: MailOffice, mail: Mail): Promise<keyof Delivered> {
  const { id, claim } = mail
  const mark = (values: Parameters<typeof Mail.update>[0]) => db.models.Mail.update(values, { where: { id, claim, state: 'sending' } })
  const giveUp = async (error: string) => {
    await mark({ state: 'failed', data: NO_DATA, error: error.slice(0, LONGEST_ERROR) })
    return 'givenUp' as const
  }
  if (mail.expiresAt && mail.expiresAt.getTime() < Date.now()) return giveUp(`it had become useless; ${mail.error ?? 'nobody could send it in time'}`)
  let letter: Rendered
  try {
    letter = render(letterSchema.parse(JSON.parse(mail.data)), office.baseUrl)
  }
  catch {
    return giveUp('what it was to say could not be read')
  }
  try {
    await office.transport({ from: office.from, to: mail.recipient, messageId: messageIdOf(mail.id, office.baseUrl), ...letter })
  }
  catch (error) {
    if (mail.attempts >= (isForGood(error) ? MOST_REFUSALS : MOST_ATTEMPTS)) return giveUp(reasonOf(error))
    await mark({ state: 'waiting', claim: null, error: reasonOf(error), nextAttemptAt: literal(`UTC_TIMESTAMP(3) + INTERVAL ${waitSeconds(mail.attempts)} SECOND`) })
    return 'postponed'
  }
  await mark({ state: 'sent', data: NO_DATA, error: null, sentAt: literal('UTC_TIMESTAMP(3)') })
  return 'sent'
}

/** The same for each attempt at a mail. */
export const messageIdOf = (id: string, baseUrl: string): string => `<${id.toLowerCase()}@${new URL(baseUrl).hostname.replace(/[[\]]/g, '')}>`

/** Seconds to wait after so many attempts. */
export const waitSeconds = (attempts: number): number => Math.min(LONGEST_WAIT_SECONDS, FIRST_WAIT_SECONDS * 2 ** Math.max(0, attempts - 1))

/** Whether a server has refused the mail itself, which it does with a number from 500 on. */
function isForGood(error: unknown): boolean {
  return error instanceof Error && 'code' in error && (error.code === 'EENVELOPE' || error.code === 'EMESSAGE')
    && 'responseCode' in error && typeof error.responseCode === 'number' && error.responseCode >= 500
}

/** What an admin may read of a failure: its code, never the server's words, which may repeat addresses and secrets. */
function reasonOf(error: unknown): string {
  if (!(error instanceof Error)) return 'unknown'
  const code = 'code' in error && typeof error.code === 'string' ? error.code : error.name
  const number = 'responseCode' in error && typeof error.responseCode === 'number' ? ` ${error.responseCode}` : ''
  return (code + number).slice(0, LONGEST_ERROR)
}

/** Gives up all that waits, where no mail server is set: it would be stale by the time that there is one. Answers how many. */
export async function dropWaiting(db: Database): Promise<number> {
  const [dropped] = await db.models.Mail.update({ state: 'failed', data: NO_DATA, error: 'no mail server is set' }, { where: { state: ['waiting', 'sending'] } })
  return dropped
}

/** Forgets mails that were sent or given up long ago, and invitations and resets that are too old to be used. */
export async function pruneMail(db: Database): Promise<void> {
  const { Invitation, Mail, Reset } = db.models
  await Mail.destroy({ where: { state: ['sent', 'failed'], createdAt: { [Op.lt]: new Date(Date.now() - KEPT_DAYS * 86_400_000) } }, limit: 5000 })
  const expired = { where: { expiresAt: { [Op.lt]: new Date() } } }
  await Invitation.destroy(expired)
  await Reset.destroy(expired)
}
