import { z } from 'zod'
import { roleSchema } from '#shared/schemas/api'

const jobSchema = z.strictObject({ name: z.string(), jobId: z.string(), sentence: z.string() })
const quotaUseSchema = z.strictObject({ name: z.string(), limitCpuSeconds: z.number(), chargedCpuSeconds: z.number(), reservedCpuSeconds: z.number(), windowDays: z.int() })

/** What each kind of mail says. CPU-seconds; instants as ISO 8601. */
export const letterSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('invitation'), token: z.string(), team: z.string(), role: roleSchema, invitedBy: z.string(), expiresAt: z.iso.datetime() }),
  z.strictObject({ kind: z.literal('reset'), token: z.string(), name: z.string(), validMinutes: z.int() }),
  z.strictObject({
    kind: z.literal('jobFinished'), ...jobSchema.shape, headline: z.string(), detail: z.string(), cautions: z.array(z.string()), cpuSeconds: z.number(),
  }),
  z.strictObject({ kind: z.literal('jobFailed'), ...jobSchema.shape, reason: z.string() }),
  z.strictObject({ kind: z.literal('quota80'), ...quotaUseSchema.shape }),
  z.strictObject({ kind: z.literal('quota100'), ...quotaUseSchema.shape }),
])
export type Letter = z.infer<typeof letterSchema>
export type LetterKind = Letter['kind']
