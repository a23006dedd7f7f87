import { QueryTypes } from 'sequelize'
import type { Transaction } from 'sequelize'
import type { Letter } from '../mail/letters'
import type { Database } from './database'
import { newId } from './id'

export interface Posting {
  to: string
  /** The user whom it is for, when there is one. */
  userId?: string
  letter: Letter
  /** Names the cause: however often it is posted, it is sent once. */
  dedupeKey: string
  /** After this it is of no use to whoever gets it. */
  expiresAt?: Date
}

/** Puts a mail among those to be sent, in the transaction of its cause; does nothing when its cause has one already. */
export async function postMail(db: Database, tx: Transaction, { to, userId, letter, dedupeKey, expiresAt }: Posting): Promise<void> {
  const now = new Date()
  await db.sequelize.query(`
    INSERT INTO mails (id, userId, recipient, kind, data, dedupeKey, state, attempts, nextAttemptAt, expiresAt, createdAt)
    VALUES (:id, :userId, :to, :kind, :data, :dedupeKey, 'waiting', 0, UTC_TIMESTAMP(3), :expiresAt, :now)
    ON DUPLICATE KEY UPDATE id = id`,
  {
    replacements: { id: newId(), userId: userId ?? null, to, kind: letter.kind, data: JSON.stringify(letter), dedupeKey, expiresAt: expiresAt ?? null, now },
    type: QueryTypes.INSERT, transaction: tx,
  })
}

/** What is kept of a mail's words when nobody is to read them any more. */
export const NO_DATA = ''

/** Takes back a mail that has not been sent, because its cause is gone. */
export async function withdrawMail(db: Database, tx: Transaction, dedupeKey: string): Promise<void> {
  await db.models.Mail.update({ state: 'failed', data: NO_DATA, error: 'taken back before it was sent' }, { where: { dedupeKey, state: 'waiting' }, transaction: tx })
}
