import { DataTypes, Model } from 'sequelize'
import type { CreationOptional, InferAttributes, InferCreationAttributes, Sequelize } from 'sequelize'
import { ROLES } from '#shared/schemas/api'
import type { Role } from '#shared/schemas/api'
import { newId } from './id'

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
  const id = { type: DataTypes.CHAR(26), primaryKey: true, defaultValue: () => newId() }
  const now = { type: DataTypes.DATE(3), allowNull: false, defaultValue: DataTypes.NOW }
  Team.init({ id, name: DataTypes.STRING(80) }, { sequelize, tableName: 'teams', timestamps: false })
  User.init({
    id: { ...id },
    teamId: DataTypes.CHAR(26),
    email: DataTypes.STRING(254),
    name: DataTypes.STRING(120),
    role: DataTypes.ENUM(...ROLES),
    passwordHash: DataTypes.STRING(255),
    active: { type: DataTypes.BOOLEAN, defaultValue: true },
    quotaCpuMicros: DataTypes.BIGINT,
    virtualTimeMicros: { type: DataTypes.BIGINT, defaultValue: 0 },
    createdAt: DataTypes.DATE(3),
    updatedAt: DataTypes.DATE(3),
  }, { sequelize, tableName: 'users', timestamps: true })
  Session.init({
    id: { ...id },
    tokenHash: DataTypes.CHAR(64),
    userId: DataTypes.CHAR(26),
    createdAt: now,
    lastSeenAt: DataTypes.DATE(3),
    expiresAt: DataTypes.DATE(3),
    revokedAt: DataTypes.DATE(3),
    userAgent: DataTypes.STRING(300),
  }, { sequelize, tableName: 'sessions', timestamps: false })
}
