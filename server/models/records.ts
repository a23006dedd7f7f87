import { DataTypes, Model } from 'sequelize'
import type { CreationOptional, InferAttributes, InferCreationAttributes, Sequelize } from 'sequelize'
import { instant, madeAt, serial, ulid } from './columns'

export class Preset extends Model<InferAttributes<Preset>, InferCreationAttributes<Preset>> {
  declare id: CreationOptional<string>
  declare teamId: string
  declare ownerId: string
  declare name: string
  declare note: string
  /** JSON text. */
  declare content: string
  /** Number of the newest version, which is what the other columns say. */
  declare version: CreationOptional<number>
  /** Whether the team sees it; otherwise its owner alone. */
  declare shared: CreationOptional<boolean>
  declare archivedAt: CreationOptional<Date | null>
  declare createdAt: CreationOptional<Date>
  declare updatedAt: CreationOptional<Date>
}

/** What a preset said at one of its versions; never changed. */
export class PresetVersion extends Model<InferAttributes<PresetVersion>, InferCreationAttributes<PresetVersion>> {
  declare presetId: string
  declare version: number
  declare name: string
  declare note: string
  /** JSON text. */
  declare content: string
  declare authorId: string
  declare createdAt: CreationOptional<Date>
}

export const LEDGER_KINDS = ['reserve', 'release', 'charge'] as const
export type LedgerKind = typeof LEDGER_KINDS[number]

export class LedgerEntry extends Model<InferAttributes<LedgerEntry>, InferCreationAttributes<LedgerEntry>> {
  declare id: CreationOptional<number>
  declare userId: string
  declare jobId: string
  declare kind: LedgerKind
  declare cpuMicros: number
  /** When the entry counts; a release carries the time of the reservation that it cancels. */
  declare effectiveAt: Date
  declare createdAt: CreationOptional<Date>
}

export class IdempotencyKey extends Model<InferAttributes<IdempotencyKey>, InferCreationAttributes<IdempotencyKey>> {
  declare userId: string
  declare key: string
  declare bodyHash: string
  declare jobId: string
  declare createdAt: CreationOptional<Date>
}

export class EventRow extends Model<InferAttributes<EventRow>, InferCreationAttributes<EventRow>> {
  declare id: CreationOptional<number>
  declare teamId: string
  /** Addressee; null: the whole team. */
  declare userId: CreationOptional<string | null>
  declare jobId: CreationOptional<string | null>
  declare type: string
  /** JSON text. */
  declare data: string
  declare createdAt: CreationOptional<Date>
}

/** Binds the tables of presets, the ledger, keys and events to a connection. */
export function initRecords(sequelize: Sequelize) {
  Preset.init({
    id: ulid(),
    teamId: DataTypes.CHAR(26),
    ownerId: DataTypes.CHAR(26),
    name: DataTypes.STRING(60),
    note: DataTypes.STRING(500),
    content: DataTypes.TEXT('long'),
    version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
    shared: { type: DataTypes.BOOLEAN, allowNull: false, defaultValue: true },
    archivedAt: instant(),
    createdAt: instant(),
    updatedAt: instant(),
  }, { sequelize, tableName: 'presets', timestamps: true })
  PresetVersion.init({
    presetId: { type: DataTypes.CHAR(26), primaryKey: true },
    version: { type: DataTypes.INTEGER, primaryKey: true },
    name: DataTypes.STRING(60),
    note: DataTypes.STRING(500),
    content: DataTypes.TEXT('long'),
    authorId: DataTypes.CHAR(26),
    createdAt: madeAt(),
  }, { sequelize, tableName: 'presetVersions', timestamps: false })
  LedgerEntry.init({
    id: serial(),
    userId: DataTypes.CHAR(26),
    jobId: DataTypes.CHAR(26),
    kind: DataTypes.ENUM(...LEDGER_KINDS),
    cpuMicros: DataTypes.BIGINT,
    effectiveAt: instant(),
    createdAt: madeAt(),
  }, { sequelize, tableName: 'ledger', timestamps: false })
  IdempotencyKey.init({
    userId: { type: DataTypes.CHAR(26), primaryKey: true },
    key: { type: DataTypes.STRING(80), primaryKey: true },
    bodyHash: DataTypes.CHAR(64),
    jobId: DataTypes.CHAR(26),
    createdAt: madeAt(),
  }, { sequelize, tableName: 'idempotencyKeys', timestamps: false })
  EventRow.init({
    id: serial(),
    teamId: DataTypes.CHAR(26),
    userId: DataTypes.CHAR(26),
    jobId: DataTypes.CHAR(26),
    type: DataTypes.STRING(20),
    data: DataTypes.TEXT('long'),
    createdAt: madeAt(),
  }, { sequelize, tableName: 'events', timestamps: false })
}
