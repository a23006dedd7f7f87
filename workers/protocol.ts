import { z } from 'zod'
import type { JobSpec } from '#shared/schemas/job'

/** What the parent asks of a solver, one task at a time. */
export type Task =
  | { kind: 'chunk', spec: JobSpec, firstTrial: number, trialCount: number }
  | { kind: 'merge', spec: JobSpec, parts: readonly Uint8Array[] }
  | { kind: 'calibrate' }

const bytes = z.custom<Uint8Array>(value => value instanceof Uint8Array)

/** What a solver answers. `cpuMicros`: CPU microseconds of the task so far, user and system. */
export const replySchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('progress'), share: z.number().min(0).max(1), cpuMicros: z.number() }),
  z.strictObject({ kind: z.literal('chunk'), payload: bytes, cpuMicros: z.number() }),
  z.strictObject({ kind: z.literal('merge'), answer: z.string(), headline: z.string(), paths: bytes, cpuMicros: z.number() }),
  z.strictObject({ kind: z.literal('calibrate'), secondsPerTrialStep: z.number().positive(), cpuMicros: z.number() }),
  // The engine refused: it would refuse again.
  z.strictObject({ kind: z.literal('refused'), message: z.string(), cpuMicros: z.number() }),
])
export type Reply = z.infer<typeof replySchema>
