import mariadb from 'mariadb'
import { Sequelize } from 'sequelize'
import { Invitation, Mail, QuotaChange, Reset, initAccounts } from './accounts'
import { CalibrationRow, Lease, WorkerRow, initFleet } from './fleet'
import { Attempt, Chunk, Job, initJobs } from './jobs'
import { Session, Team, User, initPeople } from './people'
import { EventRow, IdempotencyKey, LedgerEntry, Preset, PresetVersion, initRecords } from './records'

/** Where the database is. */
export interface DatabaseSettings {
  host: string
  port: number
  name: string
  user: string
  password: string
  poolMax: number
}

/** Driver options under which BIGINT reads as a number (checked to be exact) and DECIMAL as text. */
export const DRIVER_OPTIONS = {
  connectTimeout: 10_000,
  supportBigNumbers: false,
  decimalAsNumber: false,
  bigIntAsNumber: true,
  insertIdAsNumber: true,
  checkNumberRange: true,
} as const

export const models = {
  Attempt, CalibrationRow, Chunk, EventRow, IdempotencyKey, Invitation, Job, Lease, LedgerEntry, Mail, Preset, PresetVersion, QuotaChange, Reset,
  Session, Team, User, WorkerRow,
}
export type Models = typeof models

export interface Database {
  sequelize: Sequelize
  models: Models
}

/**
 * Opens the pool and binds the models to it; connects on first use.
 * The model classes are bound to the database opened last: one per process.
 */
export function openDatabase(settings: DatabaseSettings): Database {
  const sequelize = new Sequelize(settings.name, settings.user, settings.password, {
    dialect: 'mariadb',
    dialectModule: mariadb,
    host: settings.host,
    port: settings.port,
    // Once for each connection, not once for each transaction.
    dialectOptions: { ...DRIVER_OPTIONS, initSql: 'SET SESSION TRANSACTION ISOLATION LEVEL READ COMMITTED' },
    pool: { max: settings.poolMax, min: 0, acquire: 10_000, idle: 30_000 },
    timezone: '+00:00',
    logging: false,
  })
  initPeople(sequelize)
  initJobs(sequelize)
  initRecords(sequelize)
  initFleet(sequelize)
  initAccounts(sequelize)
  return { sequelize, models }
}

/** Closes the pool; queries still running finish first. */
export async function closeDatabase(db: Database): Promise<void> {
  await db.sequelize.close()
}
