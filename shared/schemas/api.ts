import { z } from 'zod'
import { answerSchema } from './answer'
import { idSchema, instantSchema } from './ids'
import { jobSpecSchema } from './job'
import { jobPresetSchema, presetSchema } from './presets'
import { etaSchema, waitingSchema } from './waiting'

export { idSchema, instantSchema }
const instant = instantSchema

export const ROLES = ['researcher', 'student', 'admin'] as const
export const roleSchema = z.enum(ROLES)
export type Role = z.infer<typeof roleSchema>

/** An address as it is kept: lower case. */
export const emailSchema = z.string().trim().toLowerCase().max(254).pipe(z.email({ error: 'Enter an e-mail address.' }))

export const signInSchema = z.strictObject({
  email: emailSchema,
  password: z.string().normalize('NFC').min(1, { error: 'Enter your password.' }).max(256),
})

/** CPU-seconds over the rolling window. `left` is never negative. */
export const quotaSchema = z.strictObject({
  limit: z.number(), charged: z.number(), reserved: z.number(), left: z.number(), windowDays: z.int(),
})
export type Quota = z.infer<typeof quotaSchema>

/** Price of the engine on this installation: what browser and server multiply trial-steps with. */
export const calibrationSchema = z.strictObject({ engineVersion: z.string(), secondsPerTrialStep: z.number().positive() })
export type Calibration = z.infer<typeof calibrationSchema>

export const meSchema = z.strictObject({
  user: z.strictObject({
    id: idSchema, name: z.string(), email: z.string(), role: roleSchema,
    notifyFinished: z.boolean().meta({ description: 'Gets a mail when a job of the own is done.' }),
    notifyFailed: z.boolean().meta({ description: 'Gets a mail when a job of the own has failed.' }),
  }),
  team: z.strictObject({ id: idSchema, name: z.string() }),
  quota: quotaSchema,
  calibration: calibrationSchema,
  queue: z.strictObject({ waitingJobs: z.int(), waitingCpuSeconds: z.number(), slots: z.int() }),
  openJobs: z.array(idSchema).meta({ description: 'The reader’s own jobs that wait or run, the newest hundred.' }),
})
export type Me = z.infer<typeof meSchema>

export const JOB_STATES = ['queued', 'running', 'done', 'failed', 'cancelled'] as const
export const jobStateSchema = z.enum(JOB_STATES)
export type JobState = z.infer<typeof jobStateSchema>

export const jobSummarySchema = z.strictObject({
  id: idSchema,
  sentence: z.string(),
  question: z.enum(['motion', 'switching', 'failure']),
  state: jobStateSchema,
  owner: z.strictObject({ id: idSchema, name: z.string() }),
  own: z.boolean(),
  createdAt: instant,
  startedAt: instant.nullable(),
  finishedAt: instant.nullable(),
  predictedCpuSeconds: z.number(),
  cpuSeconds: z.number(),
  progress: z.number().min(0).max(1),
  headline: z.string().nullable(),
  error: z.string().nullable().meta({ description: 'Why the job failed, in words.' }),
  preset: jobPresetSchema.nullable().meta({ description: 'The version of a preset that the job was made from.' }),
  waiting: waitingSchema.nullable().meta({ description: 'Of a queued job.' }),
  eta: etaSchema.nullable().meta({ description: 'Of a queued or running job, when it can be told.' }),
})
export type JobSummary = z.infer<typeof jobSummarySchema>

export const jobDetailSchema = z.strictObject({
  ...jobSummarySchema.shape,
  spec: jobSpecSchema,
  specHash: z.string(),
  seed: z.int(),
  engineVersion: z.string(),
  chunks: z.strictObject({ total: z.int(), done: z.int() }),
  answer: answerSchema.nullable().meta({ description: 'Partial (complete: false) while chunks are still running.' }),
})
export type JobDetail = z.infer<typeof jobDetailSchema>

/**
 * Server-sent events: `event:` is `type`, `data:` the rest as JSON, `id:` a database sequence.
 * `job`: a job of the team changed (state, progress); read it again when it is shown. `quota`: the reader's own balance changed.
 * `outlook`: why jobs of the team wait and when they end, as far as that has changed; of many waiting jobs the next ones.
 */
export const streamEventSchema = z.discriminatedUnion('type', [
  z.strictObject({ type: z.literal('job'), job: jobSummarySchema.omit({ own: true, waiting: true, eta: true }) }),
  z.strictObject({ type: z.literal('deleted'), jobId: idSchema }),
  z.strictObject({ type: z.literal('quota'), quota: quotaSchema }),
  z.strictObject({ type: z.literal('outlook'), jobs: z.array(jobSummarySchema.pick({ id: true, waiting: true, eta: true })) }),
])
export type StreamEvent = z.infer<typeof streamEventSchema>

/** RFC 9457. `errors` has one entry per faulty field: JSON pointer and message. */
export const problemSchema = z.strictObject({
  type: z.string(), title: z.string(), status: z.int(), detail: z.string().optional(), instance: z.string().optional(), requestId: z.string().optional(),
  errors: z.array(z.strictObject({ pointer: z.string(), detail: z.string() })).optional(),
  /** quota and cap refusals */
  predictedCpuSeconds: z.number().optional(), leftCpuSeconds: z.number().optional(), capCpuSeconds: z.number().optional(),
  /** what stands there now, where an edit started from an older version */
  current: presetSchema.optional(),
})
export type Problem = z.infer<typeof problemSchema>
