import { z } from 'zod'
import { JOB_STATES, idSchema, jobSummarySchema, problemSchema } from './api'
import { questionSchema } from './job'

/** Orders of the list of jobs. A minus turns one round; `cpu` is the time used, or the price while none is. */
export const JOB_SORTS = ['-created', 'created', '-cpu', 'cpu', 'state', '-state'] as const
export type JobSort = typeof JOB_SORTS[number]

export const QUESTION_KINDS = questionSchema.options.map(option => option.shape.kind.value)

/** Longest text to search for, and most words of it. */
export const SEARCH_LIMITS = { characters: 100, words: 8 } as const

const day = z.iso.datetime({ offset: true, error: 'Give an instant with its time zone, such as 2026-11-28T00:00:00Z.' })

export const jobListQuerySchema = z.strictObject({
  state: z.enum([...JOB_STATES, 'open']).optional().meta({ description: '`open`: queued or running.' }),
  owner: idSchema.optional(),
  question: z.enum(QUESTION_KINDS).optional(),
  preset: idSchema.optional().meta({ description: 'Made from any version of this preset.' }),
  from: day.optional().meta({ description: 'Asked at this instant or later.' }),
  to: day.optional().meta({ description: 'Asked before this instant.' }),
  q: z.string().trim().min(1).max(SEARCH_LIMITS.characters)
    .refine(text => text.split(/\s+/).length <= SEARCH_LIMITS.words, { error: `Search for at most ${SEARCH_LIMITS.words} words.` }).optional()
    .meta({ description: 'Words or parts of words; all of them occur in the sentence or the headline, in any case.' }),
  sort: z.enum(JOB_SORTS).optional(),
  cursor: z.string().max(160).optional().meta({ description: 'From the page before; it belongs to its sort.' }),
  limit: z.string().regex(/^\d{1,3}$/).transform(Number).pipe(z.int().min(1).max(100)).optional(),
})
export type JobListQuery = z.infer<typeof jobListQuerySchema>
export const jobListSchema = z.strictObject({ jobs: z.array(jobSummarySchema), next: z.string().nullable() })
export type JobList = z.infer<typeof jobListSchema>

/** Who has asked jobs: what the list can be filtered by. */
export const askersSchema = z.strictObject({ people: z.array(z.strictObject({ id: idSchema, name: z.string() })) })
export type Asker = z.infer<typeof askersSchema>['people'][number]

export const BULK_ACTIONS = ['cancel', 'delete', 'rerun'] as const
export type BulkAction = typeof BULK_ACTIONS[number]
/** Most jobs of one bulk command. */
export const BULK_LIMIT = 100

export const bulkSchema = z.strictObject({
  ids: z.array(idSchema).min(1).max(BULK_LIMIT).refine(ids => new Set(ids).size === ids.length, { error: 'Name each job once.' }),
  action: z.enum(BULK_ACTIONS),
})
export const bulkReplySchema = z.strictObject({
  results: z.array(z.strictObject({
    id: idSchema,
    ok: z.boolean(),
    problem: problemSchema.optional().meta({ description: 'Why nothing was done with this job.' }),
    newId: idSchema.optional().meta({ description: 'The job that runs it again.' }),
  })),
})
export type BulkResult = z.infer<typeof bulkReplySchema>['results'][number]
