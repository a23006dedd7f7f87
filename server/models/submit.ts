import { createHash } from 'node:crypto'
import type { Transaction } from 'sequelize'
import { ENGINE_VERSION, chunkJob, planJob, priceJob, specHash } from '#shared/physics/engine'
import { LIMITS } from '#shared/schemas/job'
import type { JobSpec } from '#shared/schemas/job'
import { sentence } from '#shared/utils/sentence'
import { calibrationOf } from './calibration'
import type { Database } from './database'
import { announceJob, announceQuota } from './events'
import { newId } from './id'
import { reserve } from './ledger'
import { readPin } from './presets'
import type { PinnedColumns, PresetPin } from './presets'
import { balanceOf, toMicros, toSeconds } from './quota'
import { IdempotencyKeyReused, PriceOverCap, QuotaExceeded } from './refusals'
import { inTransaction } from './transaction'

const CHUNKS_PER_INSERT = 1000

export interface Submission {
  userId: string
  teamId: string
  spec: JobSpec
  /** The same key with the same specification answers with the job that it made. */
  idempotencyKey: string
  /** The preset that it is made from. */
  preset?: PresetPin | null
}

export interface Accepted { jobId: string, replayed: boolean }

/**
 * Accepts a job: prices it, then in one transaction inserts it with its chunks, reserves its price and notes the key.
 * Its chunk rows are what the solver's dispatcher reads, so that nothing else has to happen for it to run.
 * @throws PhysicsError where the numbers make no device; NoSuchPreset, PriceOverCap, QuotaExceeded, IdempotencyKeyReused
 */
export async function submitJob(db: Database, submission: Submission): Promise<Accepted> {
  const bodyHash = intentHash(submission)
  const earlier = await findEarlier(db, submission, bodyHash)
  if (earlier) return { jobId: earlier, replayed: true }
  const pin = submission.preset ? await readPin(db, submission, submission.preset) : null
  const priced = priceAndCut(submission.spec, (await calibrationOf(db)).secondsPerTrialStep)
  return inTransaction(db, async (tx) => {
    await db.models.User.findByPk(submission.userId, { attributes: ['id'], lock: tx.LOCK.UPDATE, transaction: tx, rejectOnEmpty: true })
    const raced = await findEarlier(db, submission, bodyHash, tx)
    if (raced) return { jobId: raced, replayed: true }
    const { left } = await balanceOf(db, submission.userId, tx)
    if (priced.cpuMicros > left) throw new QuotaExceeded(toSeconds(priced.cpuMicros), toSeconds(left))
    const jobId = await insertJob(db, tx, submission, { bodyHash, priced, pin })
    await announceJob(db, tx, jobId)
    await announceQuota(db, tx, submission.userId)
    return { jobId, replayed: false }
  })
}

/** The hash that tells whether a repeated key means the same job; that of the specification where no preset is pinned. */
const intentHash = ({ spec, preset }: Submission): string =>
  preset ? createHash('sha256').update(`${specHash(spec)} ${preset.id} ${preset.version}`).digest('hex') : specHash(spec)

async function findEarlier(db: Database, { userId, idempotencyKey }: Submission, bodyHash: string, tx?: Transaction): Promise<string | undefined> {
  const row = await db.models.IdempotencyKey.findOne({ where: { userId, key: idempotencyKey }, transaction: tx ?? null })
  if (row && row.bodyHash !== bodyHash) throw new IdempotencyKeyReused()
  return row?.jobId
}

interface Priced {
  cpuMicros: number
  trials: number
  chunks: { firstTrial: number, trialCount: number, cpuMicros: number }[]
}

function priceAndCut(spec: JobSpec, secondsPerTrialStep: number): Priced {
  const plan = planJob(spec)
  const seconds = priceJob(spec, secondsPerTrialStep, plan)
  if (!(seconds <= LIMITS.cpuSeconds)) throw new PriceOverCap(seconds, LIMITS.cpuSeconds)
  const chunks = chunkJob(spec, secondsPerTrialStep, plan)
    .map(chunk => ({ ...chunk, cpuMicros: toMicros(seconds * chunk.trialCount / plan.trials) }))
  return { cpuMicros: toMicros(seconds), trials: plan.trials, chunks }
}

async function insertJob(db: Database, tx: Transaction, submission: Submission, made: { bodyHash: string, priced: Priced, pin: PinnedColumns | null }): Promise<string> {
  const { bodyHash, priced, pin } = made
  const { spec, userId, teamId } = submission
  const { Chunk, IdempotencyKey, Job } = db.models
  const { id: jobId } = await Job.create({
    id: newId(),
    teamId,
    ownerId: userId,
    question: spec.question.kind,
    sentence: sentence(spec),
    ...pin,
    spec: JSON.stringify(spec),
    specHash: specHash(spec),
    seed: spec.numerics.seed,
    engineVersion: ENGINE_VERSION,
    predictedCpuMicros: priced.cpuMicros,
    trials: priced.trials,
    chunksTotal: priced.chunks.length,
  }, { transaction: tx })
  for (let first = 0; first < priced.chunks.length; first += CHUNKS_PER_INSERT) {
    await Chunk.bulkCreate(priced.chunks.slice(first, first + CHUNKS_PER_INSERT).map((chunk, k) => ({
      jobId, ordinal: first + k, firstTrial: chunk.firstTrial, trialCount: chunk.trialCount, predictedCpuMicros: chunk.cpuMicros,
    })), { transaction: tx })
  }
  await reserve(db, tx, { userId, jobId, cpuMicros: priced.cpuMicros })
  await IdempotencyKey.create({ userId, key: submission.idempotencyKey, bodyHash, jobId }, { transaction: tx })
  return jobId
}
