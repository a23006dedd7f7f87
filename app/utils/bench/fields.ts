import { z } from 'zod'
import {
  anisotropySchema, deviceSchema, driveSchema, environmentSchema, numericsSchema, questionSchema, startSchema, stepSchema, torqueSchema, waveformSchema, writeSchema,
} from '#shared/schemas/job'
import { quantityMeta, type Dimension } from '#shared/schemas/quantities'
import type { SentencePart } from '#shared/utils/sentence'

/** Closed choices of the form: which variant of a union a value belongs to, or an enumeration. Keys are paths in the specification. */
export const CHOICES = {
  'question.kind': ['switching', 'failure', 'motion'],
  'device.anisotropy.kind': ['effectiveField', 'interface', 'inPlane'],
  'device.shape': ['cylinder', 'ellipsoid'],
  'device.torque.kind': ['constant', 'symmetric', 'asymmetric'],
  'write.direction': ['parallelToAntiparallel', 'antiparallelToParallel'],
  'write.drive.kind': ['current', 'currentDensity', 'voltage'],
  'write.waveform.kind': ['single', 'train', 'bipolar', 'points'],
  'start.kind': ['well', 'fixedAngle', 'thermalised'],
  'question.failureRule': ['afterSettling', 'atPulseEnd', 'neverCrossed'],
  'numerics.step.kind': ['automatic', 'fixed'],
} as const

export type ChoicePath = keyof typeof CHOICES
export type Choices = { [P in ChoicePath]: typeof CHOICES[P][number] }

/** Choices that a specification leaves out when nothing else is chosen. */
export const LEFT_OUT: Partial<Choices> = { 'device.shape': 'cylinder', 'write.waveform.kind': 'single', 'start.kind': 'well' }

interface Condition { choice: ChoicePath, among: readonly string[] }
interface FieldBase {
  /** where the value stands in the specification */
  path: string
  part: SentencePart
  label: string
  symbol?: string
  hint?: string
  /** the field is part of the question only under these choices */
  only?: readonly Condition[]
  /** empty: not in the specification */
  optional?: boolean
}
/** Something with a unit. Limits in SI. */
export interface QuantityField extends FieldBase { kind: 'quantity', dimension: Dimension, unit: string, min: number, max: number }
export interface CountField extends FieldBase { kind: 'count', min: number, max: number }
export interface NameField extends FieldBase { kind: 'name', longest: number }
/** Two columns, time and drive, as text. */
export interface PointsField extends FieldBase { kind: 'points' }
export type Field = QuantityField | CountField | NameField | PointsField

/** Where the schema's label is too long for a column of entries. */
const SHORT: Record<string, string> = {
  'Saturation magnetization': 'Saturation', 'Exchange stiffness': 'Exchange', 'In-plane uniaxial field': 'Uniaxial field', 'Voltage-controlled anisotropy': 'Voltage control',
}

type Only = FieldBase['only']
const when = <P extends ChoicePath>(choice: P, ...among: (typeof CHOICES[P][number])[]): readonly Condition[] => [{ choice, among }]

function quantityField(part: SentencePart, path: string, schema: z.ZodType, only?: Only): QuantityField {
  const { label, symbol, hint, dimension, unit, min, max } = quantityMeta(schema)
  return { kind: 'quantity', part, path, label: SHORT[label] ?? label, symbol, hint, dimension, unit, min, max, only, optional: schema instanceof z.ZodOptional }
}

function countField(part: SentencePart, path: string, schema: z.ZodInt, only?: Only): CountField {
  const meta = schema.meta()
  return { kind: 'count', part, path, label: String(meta?.label ?? path), hint: undefined, min: schema.minValue ?? 0, max: schema.maxValue ?? Number.MAX_SAFE_INTEGER, only }
}

const device = deviceSchema.shape
const [effectiveField, byInterface] = anisotropySchema.options
const [constant, symmetric, asymmetric] = torqueSchema.options
const [current, currentDensity, voltage] = driveSchema.options
const [motion, switching, failure] = questionSchema.options
const [automatic, fixed] = stepSchema.options
const [fixedAngle, thermalised] = startSchema.options
const [train, bipolar] = waveformSchema.options
const stray = device.strayField.unwrap().shape
const trapezoid = when('write.waveform.kind', 'single', 'train', 'bipolar')
const applied = environmentSchema.shape.appliedField.unwrap().shape

/** Every entry of the bench, in the order of the forms. Labels, units and limits come from the schemas. */
export const FIELDS: readonly Field[] = [
  quantityField('question', 'question.after', motion.shape.after, when('question.kind', 'motion')),
  quantityField('question', 'question.target', failure.shape.target, when('question.kind', 'failure')),

  { kind: 'name', part: 'device', path: 'device.label', label: 'Name', longest: 60 },
  quantityField('device', 'device.damping', device.damping),
  quantityField('device', 'device.saturationMagnetization', device.saturationMagnetization),
  quantityField('device', 'device.anisotropy.anisotropyField', effectiveField.shape.anisotropyField, when('device.anisotropy.kind', 'effectiveField')),
  quantityField('device', 'device.anisotropy.interfaceAnisotropy', byInterface.shape.interfaceAnisotropy, when('device.anisotropy.kind', 'interface', 'inPlane')),
  quantityField('device', 'device.thickness', device.thickness),
  quantityField('device', 'device.diameter', device.diameter),
  quantityField('device', 'device.exchangeStiffness', device.exchangeStiffness),
  quantityField('device', 'device.torque.efficiency', constant.shape.efficiency, when('device.torque.kind', 'constant')),
  quantityField('device', 'device.torque.polarization', symmetric.shape.polarization, when('device.torque.kind', 'symmetric', 'asymmetric')),
  quantityField('device', 'device.torque.asymmetry', asymmetric.shape.asymmetry, when('device.torque.kind', 'asymmetric')),
  quantityField('device', 'device.fieldLikeRatio', device.fieldLikeRatio),
  quantityField('device', 'device.fieldLikeQuadratic', device.fieldLikeQuadratic),
  quantityField('device', 'device.referenceTilt', device.referenceTilt),
  quantityField('device', 'device.resistanceArea', device.resistanceArea),
  quantityField('device', 'device.tunnelMagnetoresistance', device.tunnelMagnetoresistance),
  quantityField('device', 'device.secondDiameter', device.secondDiameter),
  quantityField('device', 'device.uniaxialField', device.uniaxialField),
  quantityField('device', 'device.strayField.x', stray.x),
  quantityField('device', 'device.strayField.y', stray.y),
  quantityField('device', 'device.strayField.z', stray.z),
  quantityField('device', 'device.pitch', device.pitch),
  quantityField('device', 'device.voltageAnisotropy', device.voltageAnisotropy),
  quantityField('device', 'device.barrierThickness', device.barrierThickness),
  quantityField('device', 'device.halfVoltage', device.halfVoltage),
  quantityField('device', 'device.materialTemperature', device.materialTemperature),
  quantityField('device', 'device.magnetizationTemperature', device.magnetizationTemperature),
  quantityField('device', 'device.anisotropyExponent', device.anisotropyExponent),
  quantityField('device', 'device.tmrSlope', device.tmrSlope),
  quantityField('device', 'device.thermalResistance', device.thermalResistance),

  quantityField('drive', 'write.drive.current', current.shape.current, [...when('write.drive.kind', 'current'), ...trapezoid]),
  quantityField('drive', 'write.drive.currentDensity', currentDensity.shape.currentDensity, [...when('write.drive.kind', 'currentDensity'), ...trapezoid]),
  quantityField('drive', 'write.drive.voltage', voltage.shape.voltage, [...when('write.drive.kind', 'voltage'), ...trapezoid]),
  quantityField('drive', 'question.shortest', failure.shape.shortest, when('question.kind', 'failure')),
  quantityField('drive', 'write.width', writeSchema.shape.width, trapezoid),
  quantityField('drive', 'write.edge', writeSchema.shape.edge, trapezoid),
  countField('drive', 'write.waveform.pulses', train.shape.pulses, when('write.waveform.kind', 'train')),
  quantityField('drive', 'write.waveform.period', train.shape.period, when('write.waveform.kind', 'train')),
  quantityField('drive', 'write.waveform.reverseRatio', bipolar.shape.reverseRatio, when('write.waveform.kind', 'bipolar')),
  quantityField('drive', 'write.waveform.reverseWidth', bipolar.shape.reverseWidth, when('write.waveform.kind', 'bipolar')),
  quantityField('drive', 'write.waveform.gap', bipolar.shape.gap, when('write.waveform.kind', 'bipolar')),
  { kind: 'points', part: 'drive', path: 'write.waveform.points', label: 'Points', only: when('write.waveform.kind', 'points') },
  quantityField('drive', 'write.seriesResistance', writeSchema.shape.seriesResistance),
  quantityField('drive', 'write.currentLimit', writeSchema.shape.currentLimit),

  quantityField('direction', 'start.angle', fixedAngle.shape.angle, when('start.kind', 'fixedAngle')),
  quantityField('direction', 'start.azimuth', fixedAngle.shape.azimuth, when('start.kind', 'fixedAngle')),
  quantityField('direction', 'start.duration', thermalised.shape.duration, when('start.kind', 'thermalised')),

  quantityField('environment', 'environment.temperature', environmentSchema.shape.temperature),
  quantityField('environment', 'environment.appliedField.x', applied.x),
  quantityField('environment', 'environment.appliedField.y', applied.y),
  quantityField('environment', 'environment.appliedField.z', applied.z),

  countField('counting', 'question.trials', switching.shape.trials, when('question.kind', 'switching', 'failure')),
  countField('counting', 'question.widths', failure.shape.widths, when('question.kind', 'failure')),
  countField('counting', 'question.paths', motion.shape.paths, when('question.kind', 'motion')),
  countField('counting', 'numerics.seed', numericsSchema.shape.seed),
  quantityField('counting', 'numerics.step.biasAllowed', automatic.shape.biasAllowed, when('numerics.step.kind', 'automatic')),
  quantityField('counting', 'numerics.step.step', fixed.shape.step, when('numerics.step.kind', 'fixed')),
]

const BY_PATH = new Map(FIELDS.map(field => [field.path, field]))

/** The entry at a path. Throws where there is none: paths are written in code. */
export function fieldAt(path: string): Field {
  const field = BY_PATH.get(path)
  if (!field) throw new Error(`there is no entry ${path}`)
  return field
}

/** Whether an entry belongs to what is asked under these choices. */
export const isAsked = (field: Field, choices: Choices): boolean => (field.only ?? []).every(({ choice, among }) => among.includes(choices[choice]))

/** Id of the input of a path in the page. */
export const inputId = (path: string): string => `entry-${path.replaceAll('.', '-')}`

const PARTS: readonly [prefix: string, part: SentencePart][] = [
  ['question.kind', 'question'], ['question', 'counting'], ['device', 'device'], ['write.direction', 'direction'], ['start', 'direction'], ['write', 'drive'],
  ['environment', 'environment'], ['numerics', 'counting'],
]

/**
 * The entry, and the part of the sentence that holds it, for any path into the specification: the entry itself, the only entry
 * below it, or the part alone ("environment.appliedField").
 */
export function locate(path: readonly (string | number)[], choices: Choices): { path: string | null, part: SentencePart } {
  const dotted = path.join('.')
  const asked = FIELDS.filter(field => isAsked(field, choices))
  const below = asked.filter(field => dotted !== '' && field.path.startsWith(`${dotted}.`))
  const found = asked.find(field => field.path === dotted) ?? (below.length === 1 ? below[0] : undefined)
  if (found) return { path: found.path, part: found.part }
  if (below.length > 0 && below.every(field => field.part === below[0]!.part)) return { path: null, part: below[0]!.part }
  return { path: null, part: PARTS.find(([prefix]) => dotted === prefix || dotted.startsWith(`${prefix}.`))?.[1] ?? 'question' }
}
