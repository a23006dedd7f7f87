import { z } from 'zod'
import { quantity } from './quantities'

/** Version of the stored shape of a job's specification. */
export const SPEC_VERSION = 1

export const LIMITS = {
  trials: 1_000_000,
  paths: 64,
  /** integration steps of one trial, pulse and settling together */
  stepsPerTrial: 2_000_000,
  /** predicted CPU-seconds of one job, whatever the quota */
  cpuSeconds: 36_000,
} as const

export const anisotropySchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('effectiveField'),
    anisotropyField: quantity({ label: 'Anisotropy field', symbol: 'H_k', dimension: 'field', unit: 'mT', hint: 'Effective, shape included.' }, 1, 1e7),
  }),
  z.strictObject({
    kind: z.literal('interface'),
    interfaceAnisotropy: quantity({ label: 'Interface anisotropy', symbol: 'K_i', dimension: 'interfaceEnergy', unit: 'mJ/m2', hint: 'Shape of the circular cylinder is subtracted.' }, 1e-6, 0.1),
  }),
])

export const torqueSchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('constant'),
    efficiency: quantity({ label: 'Torque efficiency', symbol: 'η', dimension: 'ratio', unit: '1' }, 1e-3, 1),
  }),
  z.strictObject({
    kind: z.literal('symmetric'),
    polarization: quantity({ label: 'Spin polarization', symbol: 'P', dimension: 'ratio', unit: '1', hint: 'η = P/(1 + P² cos θ): symmetric junction at fixed current.' }, 1e-3, 0.99),
  }),
  z.strictObject({
    kind: z.literal('asymmetric'),
    polarization: quantity({ label: 'Spin polarization', symbol: 'P', dimension: 'ratio', unit: '1' }, 1e-3, 1),
    asymmetry: quantity({ label: 'Torque asymmetry', symbol: 'Λ', dimension: 'number', unit: '1', hint: 'η = P Λ²/(Λ² cos²(θ/2) + sin²(θ/2)).' }, 0.1, 10),
  }),
])

/** One free layer and its junction. Coherent SI throughout. */
export const deviceSchema = z.strictObject({
  label: z.string().trim().min(1).max(60).meta({ label: 'Name', description: 'Name of the cell in the sentence.' }),
  damping: quantity({ label: 'Damping', symbol: 'α', dimension: 'number', unit: '1' }, 1e-4, 2),
  saturationMagnetization: quantity({ label: 'Saturation magnetization', symbol: 'Ms', dimension: 'magnetization', unit: 'kA/m' }, 1e3, 3e6),
  anisotropy: anisotropySchema,
  thickness: quantity({ label: 'Thickness', symbol: 't', dimension: 'length', unit: 'nm' }, 1e-10, 1e-7),
  diameter: quantity({ label: 'Diameter', symbol: 'd', dimension: 'length', unit: 'nm' }, 1e-9, 1e-6),
  exchangeStiffness: quantity({ label: 'Exchange stiffness', symbol: 'A', dimension: 'exchange', unit: 'pJ/m' }, 1e-13, 1e-10),
  torque: torqueSchema,
  fieldLikeRatio: quantity({ label: 'Field-like ratio', symbol: 'β', dimension: 'number', unit: '1', hint: 'b_J = β a_J.' }, -5, 5).default(0),
  referenceTilt: quantity({ label: 'Reference tilt', symbol: 'p', dimension: 'angle', unit: '°', hint: 'Angle of the reference layer from +z, towards +x.' }, 0, Math.PI / 2).default(0),
  resistanceArea: quantity({ label: 'Resistance–area', symbol: 'RA', dimension: 'resistanceArea', unit: 'Ω·µm2', hint: 'In the parallel state.' }, 1e-14, 1e-8),
  tunnelMagnetoresistance: quantity({ label: 'TMR', dimension: 'ratio', unit: '%', hint: '(R_AP − R_P)/R_P, taken constant in voltage.' }, 0, 20),
})

const fieldComponent = (axis: string) => quantity({ label: `Applied field, ${axis}`, symbol: `H_${axis}`, dimension: 'field', unit: 'mT' }, -1e7, 1e7).default(0)

export const environmentSchema = z.strictObject({
  temperature: quantity({ label: 'Temperature', symbol: 'T', dimension: 'temperature', unit: '°C', hint: 'Of the noise; material values are taken as given at this temperature.' }, 1, 1000),
  appliedField: z.strictObject({ x: fieldComponent('x'), y: fieldComponent('y'), z: fieldComponent('z') }).default({ x: 0, y: 0, z: 0 })
    .meta({ description: 'Applied plus stray field in A/m. z is normal to the film; +z is the parallel state.' }),
})

export const driveSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('current'), current: quantity({ label: 'Current', symbol: 'I', dimension: 'current', unit: 'µA' }, 0, 0.1) }),
  z.strictObject({ kind: z.literal('currentDensity'), currentDensity: quantity({ label: 'Current density', symbol: 'J', dimension: 'currentDensity', unit: 'MA/cm2' }, 0, 1e14) }),
  z.strictObject({ kind: z.literal('voltage'), voltage: quantity({ label: 'Voltage', symbol: 'V', dimension: 'voltage', unit: 'V', hint: 'Across the junction. The torque keeps a constant coefficient, set by the mean conductance.' }, 0, 10) }),
]).meta({ description: 'Magnitude of the drive. Its sign follows from the direction of the write: positive (towards +p) writes parallel, negative writes antiparallel.' })

export const directionSchema = z.enum(['parallelToAntiparallel', 'antiparallelToParallel'])

export const writeSchema = z.strictObject({
  direction: directionSchema.meta({ description: 'Near pole (start) to far pole. Parallel is +z.' }),
  drive: driveSchema,
  width: quantity({ label: 'Pulse width', symbol: 't_p', dimension: 'time', unit: 'ns', hint: 'Half amplitude to half amplitude.' }, 1e-12, 1e-5),
  edge: quantity({ label: 'Edge', symbol: 't_e', dimension: 'time', unit: 'ns', hint: 'Duration of the linear rise and of the fall, zero to full amplitude. At most the width.' }, 0, 1e-5).default(0),
})

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
  numerics: numericsSchema,
})

export type Anisotropy = z.infer<typeof anisotropySchema>
export type Torque = z.infer<typeof torqueSchema>
export type Device = z.infer<typeof deviceSchema>
export type Environment = z.infer<typeof environmentSchema>
export type Drive = z.infer<typeof driveSchema>
export type Direction = z.infer<typeof directionSchema>
export type Write = z.infer<typeof writeSchema>
export type FailureRule = z.infer<typeof failureRuleSchema>
export type Question = z.infer<typeof questionSchema>
export type JobSpec = z.infer<typeof jobSpecSchema>
export type JobSpecInput = z.input<typeof jobSpecSchema>
export type QuestionKind = Question['kind']
