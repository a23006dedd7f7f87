import { z } from 'zod'
import { deviceSchema } from './device'
import { quantity } from './quantities'

export * from './device'

/** Version of the stored shape of a job's specification. */
export const SPEC_VERSION = 1

export const LIMITS = {
  trials: 1_000_000,
  paths: 64,
  /** pulse widths with trials of one job */
  widths: 24,
  /** integration steps of one trial, pulse and settling together */
  stepsPerTrial: 2_000_000,
  /** of them, steps over which the drive changes; their coefficients are prepared */
  rampSteps: 1_000_000,
  /** points of a piecewise-linear waveform */
  waveformPoints: 4096,
  pulses: 1000,
  /** predicted CPU-seconds of one job, whatever the quota */
  cpuSeconds: 36_000,
} as const

const fieldComponent = (axis: string) => quantity({ label: `Applied field, ${axis}`, symbol: `H_${axis}`, dimension: 'field', unit: 'mT' }, -1e7, 1e7).default(0)

export const environmentSchema = z.strictObject({
  temperature: quantity({ label: 'Temperature', symbol: 'T', dimension: 'temperature', unit: '°C', hint: 'Of the noise; material values are as given unless laws lead them here.' }, 1, 1000),
  appliedField: z.strictObject({ x: fieldComponent('x'), y: fieldComponent('y'), z: fieldComponent('z') }).default({ x: 0, y: 0, z: 0 })
    .meta({ description: 'Applied field in A/m. z is normal to the film; the parallel state is +z, or +x where the easy axis lies in the film.' }),
})

export const driveSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('current'), current: quantity({ label: 'Current', symbol: 'I', dimension: 'current', unit: 'µA' }, 0, 0.1) }),
  z.strictObject({ kind: z.literal('currentDensity'), currentDensity: quantity({ label: 'Current density', symbol: 'J', dimension: 'currentDensity', unit: 'MA/cm2' }, 0, 1e14) }),
  z.strictObject({ kind: z.literal('voltage'), voltage: quantity({ label: 'Voltage', symbol: 'V', dimension: 'voltage', unit: 'V', hint: 'Of the source. The torque keeps a constant coefficient, set by the mean conductance.' }, 0, 10) }),
]).meta({ description: 'Magnitude of the drive. Its sign follows from the direction of the write: positive (towards +p) writes parallel, negative writes antiparallel.' })

export const directionSchema = z.enum(['parallelToAntiparallel', 'antiparallelToParallel'])

/** How the pulse of the write goes on, or what stands in its place. Amplitudes are multiples of the drive's; positive ones drive in the direction of the write. */
export const waveformSchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('train'),
    pulses: z.int().min(2).max(LIMITS.pulses).meta({ label: 'Pulses', description: `Number of equal pulses, 2 to ${LIMITS.pulses}.` }),
    period: quantity({ label: 'Period', symbol: 't_r', dimension: 'time', unit: 'ns', hint: 'From leading half amplitude to leading half amplitude.' }, 1e-12, 1e-5),
  }),
  z.strictObject({
    kind: z.literal('bipolar'),
    reverseRatio: quantity({ label: 'Reverse amplitude', dimension: 'ratio', unit: '%', hint: 'Of a second pulse against the write, over the amplitude of the first.' }, 0, 2),
    reverseWidth: quantity({ label: 'Reverse width', dimension: 'time', unit: 'ns', hint: 'Half amplitude to half amplitude.' }, 1e-12, 1e-5),
    gap: quantity({ label: 'Gap', dimension: 'time', unit: 'ns', hint: 'At zero drive between the two pulses.' }, 0, 1e-5),
  }),
  z.strictObject({
    kind: z.literal('points'),
    time: z.array(z.number().min(-1e-5).max(1e-4)).min(2).max(LIMITS.waveformPoints).meta({ description: 's, ascending; two equal times make a step.' }),
    amplitude: z.array(z.number().min(-1).max(1)).min(2).max(LIMITS.waveformPoints).meta({ description: 'Multiples of the drive, linear between the points.' }),
  }),
])

export const writeSchema = z.strictObject({
  direction: directionSchema.meta({ description: 'Near pole (start) to far pole. Parallel is +z.' }),
  drive: driveSchema,
  width: quantity({ label: 'Pulse width', symbol: 't_p', dimension: 'time', unit: 'ns', hint: 'Half amplitude to half amplitude.' }, 1e-12, 1e-5),
  edge: quantity({ label: 'Edge', symbol: 't_e', dimension: 'time', unit: 'ns', hint: 'Duration of the linear rise and of the fall, zero to full amplitude. At most the width.' }, 0, 1e-5).default(0),
  seriesResistance: quantity({ label: 'Series resistance', symbol: 'R_s', dimension: 'resistance', unit: 'Ω', hint: 'Of the access transistor and the lines; the junction has the rest of the voltage.' }, 0, 1e7).optional(),
  currentLimit: quantity({ label: 'Current limit', symbol: 'I_max', dimension: 'current', unit: 'µA', hint: 'Of the access transistor.' }, 1e-9, 0.1).optional(),
  waveform: waveformSchema.optional(),
})

/** Where trials start; left out: drawn from the zero-drive Boltzmann distribution of the starting well. */
export const startSchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('fixedAngle'),
    angle: quantity({ label: 'Start angle', symbol: 'θ_0', dimension: 'angle', unit: '°', hint: 'From the near pole of the easy axis.' }, 0, 1.57),
    azimuth: quantity({ label: 'Start azimuth', symbol: 'φ_0', dimension: 'angle', unit: '°', hint: 'About the easy axis.' }, -Math.PI, 2 * Math.PI),
  }),
  z.strictObject({
    kind: z.literal('thermalised'),
    duration: quantity({ label: 'Thermalised for', dimension: 'time', unit: 'ns', hint: 'Without drive, from the bottom of the starting well; then the pulse begins.' }, 1e-12, 1e-5),
  }),
])

export const failureRuleSchema = z.enum(['afterSettling', 'atPulseEnd', 'neverCrossed']).meta({
  description: 'afterSettling: after the pulse m reaches 0.9 of the starting well’s own m·e before 0.9 of the other’s. atPulseEnd: m·e on the starting side when the pulse has ended. neverCrossed: m·e never crossed 0 during the pulse.',
})

export const questionSchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('motion'),
    paths: z.int().min(1).max(LIMITS.paths).meta({ label: 'Paths with noise', description: `Number of paths with noise, 1 to ${LIMITS.paths}.` }),
    after: quantity({ label: 'Watch on for', dimension: 'time', unit: 'ns', hint: 'Time shown after the pulse has ended.' }, 0, 1e-6).default(0),
  }),
  z.strictObject({
    kind: z.literal('switching'),
    trials: z.int().min(10).max(LIMITS.trials).meta({ label: 'Trials', description: `Number of independent writes, 10 to ${LIMITS.trials}.` }),
    failureRule: failureRuleSchema.default('afterSettling'),
  }),
  z.strictObject({
    kind: z.literal('failure'),
    shortest: quantity({ label: 'Shortest pulse', symbol: 't_0', dimension: 'time', unit: 'ns', hint: 'Asked are widths from this one to the pulse width.' }, 1e-12, 1e-5),
    widths: z.int().min(2).max(LIMITS.widths).meta({ label: 'Widths with trials', description: `Number of widths, evenly spaced, at which trials check the solution, 2 to ${LIMITS.widths}.` }),
    trials: z.int().min(10).max(LIMITS.trials).meta({ label: 'Trials', description: `Independent writes at each of the widths, 10 to ${LIMITS.trials}.` }),
    target: quantity({ label: 'Target error', dimension: 'ratio', unit: '1', hint: 'Write error that the pulse width is read off for.' }, 1e-15, 0.5).default(1e-9),
    failureRule: failureRuleSchema.default('afterSettling'),
  }),
])

export const stepSchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('automatic'),
    biasAllowed: quantity({ label: 'Write-error bias allowed', dimension: 'ratio', unit: '%', hint: 'Relative bias of the write error from the finite step; the step follows from it, from α and from the reduced width.' }, 1e-4, 0.1).default(0.01),
  }),
  z.strictObject({
    kind: z.literal('fixed'),
    step: quantity({ label: 'Step', symbol: 'Δt', dimension: 'time', unit: 'ps' }, 1e-15, 1e-10),
  }),
])

export const numericsSchema = z.strictObject({
  seed: z.int().min(0).max(4_294_967_295).meta({ label: 'Seed', description: 'Same specification, seed and engine version: same bytes.' }),
  step: stepSchema.default({ kind: 'automatic', biasAllowed: 0.01 }),
})

/** What a job asks: the single shape of the form, the API, the stored row and the command line. */
export const jobSpecSchema = z.strictObject({
  schemaVersion: z.literal(SPEC_VERSION).default(SPEC_VERSION),
  question: questionSchema,
  device: deviceSchema,
  environment: environmentSchema,
  write: writeSchema.refine(write => write.edge <= write.width, { path: ['edge'], error: 'An edge longer than the width never reaches full amplitude.' }),
  start: startSchema.optional(),
  numerics: numericsSchema,
})

export type Environment = z.infer<typeof environmentSchema>
export type Drive = z.infer<typeof driveSchema>
export type Direction = z.infer<typeof directionSchema>
export type Write = z.infer<typeof writeSchema>
export type Start = z.infer<typeof startSchema>
export type Waveform = z.infer<typeof waveformSchema>
export type FailureRule = z.infer<typeof failureRuleSchema>
export type Question = z.infer<typeof questionSchema>
export type JobSpec = z.infer<typeof jobSpecSchema>
export type JobSpecInput = z.input<typeof jobSpecSchema>
export type QuestionKind = Question['kind']
