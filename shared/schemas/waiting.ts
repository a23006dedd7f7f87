import { z } from 'zod'

/** Why a job that is queued has not begun, as a closed set. */
export const WAIT_REASONS = ['starting', 'noWorkers', 'busy', 'own', 'share', 'mending'] as const
export type WaitReason = typeof WAIT_REASONS[number]

/** What stands between a queued job and its first chunk. */
export const waitingSchema = z.strictObject({
  reason: z.enum(WAIT_REASONS).meta({ description: 'starting: a slot is free; noWorkers: no worker is connected; busy: every slot works; own: earlier jobs of the same person; share: others are served first by the fair order; mending: the queue is being put right.' }),
  words: z.string().meta({ description: 'The reason in a sentence.' }),
  jobsBefore: z.int().min(0).meta({ description: 'Jobs that are given work before this one gets its first.' }),
  cpuSecondsBefore: z.number().min(0).meta({ description: 'Predicted CPU-seconds of that work.' }),
})
export type Waiting = z.infer<typeof waitingSchema>

/** When a job will be over: four of five end in the range. */
export const etaSchema = z.strictObject({ low: z.iso.datetime(), high: z.iso.datetime() })
  .meta({ description: 'Range that holds the end with a probability of 80 %, as past ranges of this installation have borne out.' })
export type Eta = z.infer<typeof etaSchema>
