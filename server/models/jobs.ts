import { DataTypes, Model } from 'sequelize'
import type { CreationOptional, InferAttributes, InferCreationAttributes, Sequelize } from 'sequelize'
import { JOB_STATES } from '#shared/schemas/api'
import type { JobState } from '#shared/schemas/api'
import type { QuestionKind } from '#shared/schemas/job'
import { counter, instant, madeAt, micros, serial, ulid } from './columns'

export const CHUNK_STATES = ['ready', 'queued', 'running', 'done', 'cancelled', 'failed'] as const
export type ChunkState = typeof CHUNK_STATES[number]

export const ATTEMPT_OUTCOMES = ['running', 'done', 'lost', 'killed', 'cancelled', 'failed'] as const
export type AttemptOutcome = typeof ATTEMPT_OUTCOMES[number]

export class Job extends Model<InferAttributes<Job>, InferCreationAttributes<Job>> {
  declare id: CreationOptional<string>
  declare teamId: string
  declare ownerId: string
  declare state: CreationOptional<JobState>
  declare question: QuestionKind
  declare sentence: string
  /** The version of a preset that it was made from, with the name it had; null where it was made from none. */
  declare presetId: CreationOptional<string | null>
  declare presetVersion: CreationOptional<number | null>
  declare presetName: CreationOptional<string | null>
  /** Whether the device differs from that version. */
  declare presetChanged: CreationOptional<boolean | null>
  /** The specification as JSON text. */
  declare spec: string
  declare specHash: string
  declare seed: number
  declare engineVersion: string
  declare predictedCpuMicros: number
  /** CPU microseconds of the attempts that have ended. */
  declare cpuMicros: CreationOptional<number>
  declare trials: number
  declare chunksTotal: number
  declare chunksDone: CreationOptional<number>
  declare headline: CreationOptional<string | null>
  /** The answer as JSON text. */
  declare answer: CreationOptional<string | null>
  /** Packed arrays that belong to the answer. */
  declare paths: CreationOptional<Buffer | null>
  /** Why the job failed, in words for its owner. */
  declare error: CreationOptional<string | null>
  declare settledAt: CreationOptional<Date | null>
  declare createdAt: CreationOptional<Date>
  declare startedAt: CreationOptional<Date | null>
  declare finishedAt: CreationOptional<Date | null>
  declare deletedAt: CreationOptional<Date | null>
}

/** Columns of a job without its large ones. */
export const JOB_SUMMARY_COLUMNS = [
  'id', 'teamId', 'ownerId', 'state', 'question', 'sentence', 'predictedCpuMicros', 'cpuMicros', 'chunksTotal', 'chunksDone',
  'headline', 'error', 'createdAt', 'startedAt', 'finishedAt', 'presetId', 'presetVersion', 'presetName', 'presetChanged',
] as const satisfies readonly (keyof InferAttributes<Job>)[]

export class Chunk extends Model<InferAttributes<Chunk>, InferCreationAttributes<Chunk>> {
  declare id: CreationOptional<number>
  declare jobId: string
  declare ordinal: number
  declare firstTrial: number
  declare trialCount: number
  declare predictedCpuMicros: number
  declare state: CreationOptional<ChunkState>
  /** Fencing number: raised by every claim; a write that carries an older one is refused. */
  declare attempt: CreationOptional<number>
  declare starts: CreationOptional<number>
  declare workerId: CreationOptional<string | null>
  declare queuedAt: CreationOptional<Date | null>
  declare startedAt: CreationOptional<Date | null>
  declare heartbeatAt: CreationOptional<Date | null>
  declare finishedAt: CreationOptional<Date | null>
  /** Permille. */
  declare progress: CreationOptional<number>
  declare cpuMicros: CreationOptional<number>
  declare payload: CreationOptional<Buffer | null>
  /** SHA-256, hex, of the payload. */
  declare checksum: CreationOptional<string | null>
  declare error: CreationOptional<string | null>
}

export class Attempt extends Model<InferAttributes<Attempt>, InferCreationAttributes<Attempt>> {
  declare id: CreationOptional<number>
  declare chunkId: number
  declare attempt: number
  declare workerId: string
  declare outcome: CreationOptional<AttemptOutcome>
  declare cpuMicros: CreationOptional<number>
  declare startedAt: Date
  declare endedAt: CreationOptional<Date | null>
  declare error: CreationOptional<string | null>
}

/** Binds the tables of jobs to a connection. */
export function initJobs(sequelize: Sequelize) {
  Job.init({
    id: ulid(),
    teamId: DataTypes.CHAR(26),
    ownerId: DataTypes.CHAR(26),
    state: { type: DataTypes.ENUM(...JOB_STATES), defaultValue: 'queued' },
    question: DataTypes.STRING(20),
    sentence: DataTypes.STRING(500),
    presetId: DataTypes.CHAR(26),
    presetVersion: DataTypes.INTEGER,
    presetName: DataTypes.STRING(60),
    presetChanged: DataTypes.BOOLEAN,
    spec: DataTypes.TEXT('long'),
    specHash: DataTypes.CHAR(64),
    seed: DataTypes.INTEGER.UNSIGNED,
    engineVersion: DataTypes.STRING(20),
    predictedCpuMicros: DataTypes.BIGINT,
    cpuMicros: micros(),
    trials: DataTypes.INTEGER,
    chunksTotal: DataTypes.INTEGER,
    chunksDone: counter(),
    headline: DataTypes.STRING(300),
    answer: DataTypes.TEXT('long'),
    paths: DataTypes.BLOB('long'),
    error: DataTypes.STRING(1000),
    settledAt: instant(),
    createdAt: madeAt(),
    startedAt: instant(),
    finishedAt: instant(),
    deletedAt: instant(),
  }, { sequelize, tableName: 'jobs', timestamps: false })
  Chunk.init({
    id: serial(),
    jobId: DataTypes.CHAR(26),
    ordinal: DataTypes.INTEGER,
    firstTrial: DataTypes.INTEGER,
    trialCount: DataTypes.INTEGER,
    predictedCpuMicros: DataTypes.BIGINT,
    state: { type: DataTypes.ENUM(...CHUNK_STATES), defaultValue: 'ready' },
    attempt: counter(),
    starts: counter(),
    workerId: DataTypes.STRING(64),
    queuedAt: instant(),
    startedAt: instant(),
    heartbeatAt: instant(),
    finishedAt: instant(),
    progress: { type: DataTypes.SMALLINT, allowNull: false, defaultValue: 0 },
    cpuMicros: micros(),
    payload: DataTypes.BLOB('long'),
    checksum: DataTypes.CHAR(64),
    error: DataTypes.STRING(1000),
  }, { sequelize, tableName: 'chunks', timestamps: false })
  Attempt.init({
    id: serial(),
    chunkId: DataTypes.BIGINT,
    attempt: DataTypes.INTEGER,
    workerId: DataTypes.STRING(64),
    outcome: { type: DataTypes.ENUM(...ATTEMPT_OUTCOMES), defaultValue: 'running' },
    cpuMicros: micros(),
    startedAt: instant(),
    endedAt: instant(),
    error: DataTypes.STRING(1000),
  }, { sequelize, tableName: 'attempts', timestamps: false })
}
