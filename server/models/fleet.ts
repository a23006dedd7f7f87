import { DataTypes, Model } from 'sequelize'
import type { CreationOptional, InferAttributes, InferCreationAttributes, Sequelize } from 'sequelize'
import { instant, madeAt } from './columns'

/** A named lease; whoever holds it leads until `expiresAt` on the database's clock. */
export class Lease extends Model<InferAttributes<Lease>, InferCreationAttributes<Lease>> {
  declare name: string
  declare holder: string
  declare expiresAt: Date
}

/** A running worker process. */
export class WorkerRow extends Model<InferAttributes<WorkerRow>, InferCreationAttributes<WorkerRow>> {
  declare id: string
  declare host: string
  declare pid: number
  declare slots: number
  declare startedAt: CreationOptional<Date>
  declare heartbeatAt: Date
}

/** Measured price of one engine version on this installation. */
export class CalibrationRow extends Model<InferAttributes<CalibrationRow>, InferCreationAttributes<CalibrationRow>> {
  declare engineVersion: string
  declare secondsPerTrialStep: number
  declare measuredAt: CreationOptional<Date>
}

/** Binds the tables of workers to a connection. */
export function initFleet(sequelize: Sequelize) {
  Lease.init({
    name: { type: DataTypes.STRING(40), primaryKey: true },
    holder: DataTypes.STRING(64),
    expiresAt: instant(),
  }, { sequelize, tableName: 'leases', timestamps: false })
  WorkerRow.init({
    id: { type: DataTypes.STRING(64), primaryKey: true },
    host: DataTypes.STRING(255),
    pid: DataTypes.INTEGER,
    slots: DataTypes.INTEGER,
    startedAt: madeAt(),
    heartbeatAt: instant(),
  }, { sequelize, tableName: 'workers', timestamps: false })
  CalibrationRow.init({
    engineVersion: { type: DataTypes.STRING(20), primaryKey: true },
    secondsPerTrialStep: DataTypes.DOUBLE,
    measuredAt: madeAt(),
  }, { sequelize, tableName: 'calibrations', timestamps: false })
}
