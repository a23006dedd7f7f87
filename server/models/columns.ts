import { DataTypes } from 'sequelize'
import { newId } from './id'

// Sequelize writes into the definitions that it is given, so each column gets one of its own.

/** Primary key that the application makes. */
export const ulid = () => ({ type: DataTypes.CHAR(26), primaryKey: true, defaultValue: () => newId() })
/** Primary key that the database counts. */
export const serial = () => ({ type: DataTypes.BIGINT, primaryKey: true, autoIncrement: true })
/** Instant in UTC, milliseconds. */
export const instant = () => ({ type: DataTypes.DATE(3) })
/** Instant that defaults to the time of insertion. */
export const madeAt = () => ({ type: DataTypes.DATE(3), allowNull: false, defaultValue: DataTypes.NOW })
/** Count that starts at 0. */
export const counter = () => ({ type: DataTypes.INTEGER, allowNull: false, defaultValue: 0 })
/** CPU microseconds that start at 0. */
export const micros = () => ({ type: DataTypes.BIGINT, allowNull: false, defaultValue: 0 })
