import { DataTypes, Model } from 'sequelize'
import type { CreationOptional, InferAttributes, InferCreationAttributes, Sequelize } from 'sequelize'
import { ROLES } from '#shared/schemas/api'
import type { Role } from '#shared/schemas/api'
import { instant, madeAt, micros, ulid } from './columns'

export class Team extends Model<InferAttributes<Team>, InferCreationAttributes<Team>> {
  declare id: CreationOptional<string>
  declare name: string
}

export class User extends Model<InferAttributes<User>, InferCreationAttributes<User>> {
  declare id: CreationOptional<string>
  declare teamId: string
  /** Lower case. */
  declare email: string
  declare name: string
  declare role: Role
  /** scrypt in the PHC string format. */
  declare passwordHash: string
  declare active: CreationOptional<boolean>
  /** CPU microseconds that may be used in the rolling window. */
  declare quotaCpuMicros: number
  /** CPU microseconds handed out so far: the dispatcher serves the user with the least first. */
  declare virtualTimeMicros: CreationOptional<number>
  /** Which mails about own jobs are wanted. */
  declare notifyFinished: CreationOptional<boolean>
  declare notifyFailed: CreationOptional<boolean>
  declare createdAt: CreationOptional<Date>
  declare updatedAt: CreationOptional<Date>
}

export class Session extends Model<InferAttributes<Session>, InferCreationAttributes<Session>> {
  declare id: CreationOptional<string>
  /** SHA-256, hex, of the random id in the sealed cookie. */
  declare tokenHash: string
  declare userId: string
  declare createdAt: CreationOptional<Date>
  declare lastSeenAt: Date
  declare expiresAt: Date
  declare revokedAt: CreationOptional<Date | null>
  declare userAgent: string
}

/** Binds the tables of people to a connection. */
export function initPeople(sequelize: Sequelize) {
  Team.init({ id: ulid(), name: DataTypes.STRING(80) }, { sequelize, tableName: 'teams', timestamps: false })
  User.init({
    id: ulid(),
    teamId: DataTypes.CHAR(26),
    email: DataTypes.STRING(254),
    name: DataTypes.STRING(120),
    role: DataTypes.ENUM(...ROLES),
    passwordHash: DataTypes.STRING(255),
    active: { type: DataTypes.BOOLEAN, defaultValue: true },
    quotaCpuMicros: DataTypes.BIGINT,
    virtualTimeMicros: micros(),
    notifyFinished: { type: DataTypes.BOOLEAN, defaultValue: true },
    notifyFailed: { type: DataTypes.BOOLEAN, defaultValue: true },
    createdAt: instant(),
    updatedAt: instant(),
  }, { sequelize, tableName: 'users', timestamps: true })
  Session.init({
    id: ulid(),
    tokenHash: DataTypes.CHAR(64),
    userId: DataTypes.CHAR(26),
    createdAt: madeAt(),
    lastSeenAt: instant(),
    expiresAt: instant(),
    revokedAt: instant(),
    userAgent: DataTypes.STRING(300),
  }, { sequelize, tableName: 'sessions', timestamps: false })
}
