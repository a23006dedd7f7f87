import { z } from 'zod'
import { failureRuleSchema } from './job'

/** Count of events among independent trials with its exact (Clopper–Pearson) 95 % interval. */
export const proportionSchema = z.strictObject({
  count: z.int().min(0), of: z.int().min(1), value: z.number(), low: z.number(), high: z.number(),
})
/** A mean-like estimate in SI with standard error and 95 % interval. */
export const estimateSchema = z.strictObject({ value: z.number(), standardError: z.number(), low: z.number(), high: z.number() })

const series = z.array(z.number())
const bandSchema = z.strictObject({ low: series, median: series, high: series, mean: series })

/** What both kinds of answer say of the run. */
const runSchema = z.strictObject({
  engineVersion: z.string(),
  specHash: z.string().meta({ description: 'SHA-256 of the canonical specification.' }),
  seed: z.int(),
  scheme: z.string().meta({ description: 'Integration scheme in words.' }),
  step: z.number().meta({ description: 'Longest step used, s.' }),
  phaseStep: z.number().meta({ description: 'ω·Δt at the device’s largest precession frequency.' }),
  stepFrom: z.enum(['bias', 'phase', 'fixed']).meta({ description: 'What set the step: the write-error bias allowed, the cap on ω·Δt, or the user.' }),
  trialSteps: z.number().meta({ description: 'Integration steps of all trials together.' }),
})

/** Layout of the binary paths that go with an answer: Float32 [path][sample][x, y, z]. */
export const pathsLayoutSchema = z.strictObject({
  paths: z.int().min(0), samples: z.int().min(0), start: z.number(), interval: z.number(),
})

export const deterministicPathSchema = z.strictObject({
  startAngle: z.number().meta({ description: 'Angle from the near pole at which the noiseless path starts, rad (rms of the zero-drive well).' }),
  time: series.meta({ description: 's; 0 at the leading half amplitude.' }),
  m: series.meta({ description: 'x, y, z of each sample in turn.' }),
  crossing: z.number().nullable().meta({ description: 'Time at which m·e first crosses 0, s; null when it does not.' }),
  endsFar: z.boolean().meta({ description: 'Whether the path ends on the far side.' }),
})

/** A write error without sampling error, and how many standard errors the count of trials lies from it. */
const solvedSchema = z.strictObject({ value: z.number(), apart: z.number() })

const wordsSchema = z.strictObject({
  headline: z.string().meta({ description: 'The answer in one sentence.' }),
  detail: z.string().meta({ description: 'Its uncertainty.' }),
  cautions: z.array(z.string()),
})

export const switchingAnswerSchema = z.strictObject({
  kind: z.literal('switching'),
  complete: z.boolean(),
  words: wordsSchema,
  trials: z.int(),
  failureRule: failureRuleSchema,
  failures: z.strictObject({
    afterSettling: proportionSchema,
    atPulseEnd: proportionSchema,
    neverCrossed: proportionSchema,
  }),
  agreement: z.discriminatedUnion('kind', [
    z.strictObject({ kind: z.literal('solved'), afterSettling: solvedSchema, atPulseEnd: solvedSchema, neverCrossed: solvedSchema }),
    z.strictObject({ kind: z.literal('missing'), reason: z.string().meta({ description: 'Why there is no solution without sampling, in words.' }) }),
  ]).optional().meta({ description: 'Write errors by the axial Fokker–Planck equation beside the counted ones; in complete answers of engines that give them.' }),
  undecided: z.int().meta({ description: 'Trials still between the wells when watching ended; they count as failed after settling.' }),
  time: z.strictObject({
    crossed: z.int(),
    mean: estimateSchema.nullable().meta({ description: 'Mean first-passage time of the trials that crossed during the pulse.' }),
    spread: estimateSchema.nullable().meta({ description: 'Standard deviation of the same.' }),
    percentiles: z.array(z.strictObject({
      share: z.number(), value: z.number().nullable(), low: z.number().nullable(), high: z.number().nullable(),
    })).meta({ description: 'Time by which this share of all trials has crossed; null where the pulse is too short to tell.' }),
  }),
  survival: z.strictObject({ time: series, value: series, low: series, high: series }).meta({ description: 'Share that has not crossed yet, with pointwise 95 % Wilson intervals.' }),
  ensemble: z.strictObject({
    time: series.meta({ description: 's; 0 at the leading half amplitude.' }),
    moment: bandSchema.meta({ description: 'm·e, e the easy axis at rest with +e parallel.' }),
    resistance: bandSchema.meta({ description: 'Ω, at the drive of the moment and cos θ = m·p.' }),
  }).optional().meta({ description: 'All trials over time, counted in 200 levels of m·e: 5, 50 and 95 % of them, and the mean.' }),
  energy: estimateSchema.nullable().optional().meta({ description: 'Energy drawn from the source in a write, J: mean over the trials.' }),
  histogram: z.strictObject({ edges: series, counts: z.array(z.int()) }),
  deterministic: deterministicPathSchema,
  paths: pathsLayoutSchema,
  run: runSchema,
})

export const motionAnswerSchema = z.strictObject({
  kind: z.literal('motion'),
  complete: z.boolean(),
  words: wordsSchema,
  deterministic: deterministicPathSchema,
  ended: proportionSchema.nullable().meta({ description: 'Paths with noise that end on the far side.' }),
  crossed: z.int().meta({ description: 'Paths with noise that crossed m·e = 0 while watched.' }),
  crossings: z.array(z.number().nullable()).meta({ description: 'First crossing of each path, s.' }),
  mean: z.strictObject({ time: series, m: series }).meta({ description: 'Mean of the paths with noise: x, y, z of each sample in turn.' }),
  paths: pathsLayoutSchema,
  run: runSchema,
})

/** Write errors against width, without sampling error and counted. */
export const failureAnswerSchema = z.strictObject({
  kind: z.literal('failure'),
  complete: z.boolean(),
  words: wordsSchema,
  failureRule: failureRuleSchema,
  target: z.number().meta({ description: 'Write error that the width is read off for.' }),
  needed: z.strictObject({
    width: z.number().meta({ description: 's' }), standardError: z.number().nullable().meta({ description: 's; null where there is no sampling error.' }),
    from: z.enum(['solution', 'extrapolation']).meta({ description: 'Read off the solution, or off a straight line through the logarithms of the counted errors.' }),
  }).nullable().meta({ description: 'Pulse width for the target; null where neither way leads to one.' }),
  checks: z.array(z.strictObject({
    width: z.number().meta({ description: 's' }), trials: z.int().min(1), undecided: z.int(),
    failures: z.strictObject({ afterSettling: proportionSchema, atPulseEnd: proportionSchema, neverCrossed: proportionSchema }),
    solved: solvedSchema.nullable().meta({ description: 'By the rule that is asked.' }),
  })).meta({ description: 'Trials at each width, as far as they are done.' }),
  solution: z.discriminatedUnion('kind', [
    z.strictObject({
      kind: z.literal('solved'), width: series.meta({ description: 's' }), value: series.meta({ description: 'Write error by the rule that is asked; 0 below 1e-15.' }),
      closedForm: series.nullable().meta({ description: 'The linearised closed form at the same widths: right in its slope, not in its height.' }),
    }),
    z.strictObject({ kind: z.literal('missing'), reason: z.string() }),
  ]).meta({ description: 'Axial Fokker–Planck equation, without sampling error.' }),
  run: runSchema,
})

export const answerSchema = z.discriminatedUnion('kind', [switchingAnswerSchema, motionAnswerSchema, failureAnswerSchema])

/** Answers that bring paths to look at. */
export type PathsAnswer = Exclude<Answer, FailureAnswer>
export const bringsPaths = (answer: Answer | null | undefined): answer is PathsAnswer => answer != null && answer.kind !== 'failure'

export type Proportion = z.infer<typeof proportionSchema>
export type Estimate = z.infer<typeof estimateSchema>
export type DeterministicPath = z.infer<typeof deterministicPathSchema>
export type PathsLayout = z.infer<typeof pathsLayoutSchema>
export type SwitchingAnswer = z.infer<typeof switchingAnswerSchema>
export type FailureAnswer = z.infer<typeof failureAnswerSchema>
export type MotionAnswer = z.infer<typeof motionAnswerSchema>
export type Answer = z.infer<typeof answerSchema>
export type RunRecord = z.infer<typeof runSchema>
