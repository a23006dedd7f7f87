import { DataTypes, Model } from 'sequelize'
import type { CreationOptional, InferAttributes, InferCreationAttributes, Sequelize } from 'sequelize'
import { ROLES } from '#shared/schemas/api'
import type { Role } from '#shared/schemas/api'
import { counter, instant, madeAt, serial, ulid } from './columns'

/** An invitation that is open; it goes when it is accepted, replaced or withdrawn. */
export class Invitation extends Model<InferAttributes<Invitation>, InferCreationAttributes<Invitation>> {
  declare id: CreationOptional<string>
  declare teamId: string
  /** Lower case. */
  declare email: string
  declare role: Role
  /** SHA-256, hex, of the token in the mail. */
  declare tokenHash: string
  declare invitedById: string
  declare createdAt: CreationOptional<Date>
  declare expiresAt: Date
}

/** The open password reset of a user: one at most. */
export class Reset extends Model<InferAttributes<Reset>, InferCreationAttributes<Reset>> {
  declare userId: string
  /** SHA-256, hex, of the token in the mail. */
  declare tokenHash: string
  declare createdAt: CreationOptional<Date>
  declare expiresAt: Date
}

export class QuotaChange extends Model<InferAttributes<QuotaChange>, InferCreationAttributes<QuotaChange>> {
  declare id: CreationOptional<number>
  declare userId: string
  declare byId: string
  declare fromCpuMicros: number
  declare toCpuMicros: number
  declare reason: string
  declare createdAt: CreationOptional<Date>
}

export const MAIL_STATES = ['waiting', 'sending', 'sent', 'failed'] as const
export type MailState = typeof MAIL_STATES[number]

export class Mail extends Model<InferAttributes<Mail>, InferCreationAttributes<Mail>> {
  declare id: CreationOptional<string>
  /** Whom it is for, when that is a user. */
  declare userId: CreationOptional<string | null>
  declare recipient: string
  declare kind: string
  /** What the mail says, as JSON text; emptied once it is sent or given up, since it may hold a link that lets somebody in. */
  declare data: string
  /** Names the cause: one mail for each. */
  declare dedupeKey: string
  declare state: CreationOptional<MailState>
  declare attempts: CreationOptional<number>
  /** When it is to be sent; while `sending`, when the attempt counts as lost. */
  declare nextAttemptAt: Date
  /** When what it says is of no use any more. */
  declare expiresAt: CreationOptional<Date | null>
  /** Names the attempt that may say how it ended. */
  declare claim: CreationOptional<string | null>
  declare error: CreationOptional<string | null>
  declare createdAt: CreationOptional<Date>
  declare sentAt: CreationOptional<Date | null>
}

/** Binds the tables of accounts and mail to a connection. */
export function initAccounts(sequelize: Sequelize) {
  Invitation.init({
    id: ulid(),
    teamId: DataTypes.CHAR(26),
    email: DataTypes.STRING(254),
    role: DataTypes.ENUM(...ROLES),
    tokenHash: DataTypes.CHAR(64),
    invitedById: DataTypes.CHAR(26),
    createdAt: madeAt(),
    expiresAt: instant(),
  }, { sequelize, tableName: 'invitations', timestamps: false })
  Reset.init({
    userId: { type: DataTypes.CHAR(26), primaryKey: true },
    tokenHash: DataTypes.CHAR(64),
    createdAt: madeAt(),
    expiresAt: instant(),
  }, { sequelize, tableName: 'resets', timestamps: false })
  QuotaChange.init({
    id: serial(),
    userId: DataTypes.CHAR(26),
    byId: DataTypes.CHAR(26),
    fromCpuMicros: DataTypes.BIGINT,
    toCpuMicros: DataTypes.BIGINT,
    reason: DataTypes.STRING(300),
    createdAt: madeAt(),
  }, { sequelize, tableName: 'quotaChanges', timestamps: false })
  Mail.init({
    id: ulid(),
    userId: DataTypes.CHAR(26),
    recipient: DataTypes.STRING(254),
    kind: DataTypes.STRING(20),
    data: DataTypes.TEXT,
    dedupeKey: DataTypes.STRING(100),
    state: { type: DataTypes.ENUM(...MAIL_STATES), defaultValue: 'waiting' },
    attempts: counter(),
    nextAttemptAt: instant(),
    expiresAt: instant(),
    claim: DataTypes.STRING(64),
    error: DataTypes.STRING(300),
    createdAt: madeAt(),
    sentAt: instant(),
  }, { sequelize, tableName: 'mails', timestamps: false })
}
