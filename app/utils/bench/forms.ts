import type { SentencePart } from '#shared/utils/sentence'
import { CHOICES, FIELDS, isAsked, type ChoicePath, type Choices } from './fields'

export interface Option { value: string, text: string, note?: string }
export interface ChoiceForm { path: ChoicePath, label: string, look: 'radios' | 'select', options: readonly Option[] }

const CHOICE_FORMS: { [P in ChoicePath]: Omit<ChoiceForm, 'path' | 'options'> & { words: Record<typeof CHOICES[P][number], Omit<Option, 'value'>> } } = {
  'question.kind': {
    label: 'What is asked', look: 'radios', words: {
      switching: { text: 'How fast does it switch?', note: 'Many writes with thermal noise: when they cross, how widely they spread, how many fail.' },
      failure: { text: 'How often does the write fail?', note: 'Write error against pulse width, down to 10⁻¹³ where it can be solved, checked by trials at some widths.' },
      motion: { text: 'How does it move?', note: 'A few paths with noise beside the one without: on the sphere and in time.' },
    },
  },
  'device.anisotropy.kind': {
    label: 'Anisotropy as', look: 'select', words: { effectiveField: { text: 'effective field' }, interface: { text: 'interface energy' }, inPlane: { text: 'easy axis in plane' } },
  },
  'device.shape': {
    label: 'Shape factors of', look: 'select', words: { cylinder: { text: 'cylinder' }, ellipsoid: { text: 'ellipsoid' } },
  },
  'device.torque.kind': {
    label: 'Torque', look: 'select', words: { constant: { text: 'constant in angle' }, symmetric: { text: 'symmetric junction' }, asymmetric: { text: 'asymmetric' } },
  },
  'write.direction': {
    label: 'Direction of the write', look: 'radios', words: {
      parallelToAntiparallel: { text: 'from parallel to antiparallel', note: 'The moment starts up, along the reference layer; the drive pushes it away.' },
      antiparallelToParallel: { text: 'from antiparallel to parallel', note: 'The moment starts down, against the reference layer; the drive pulls it in.' },
    },
  },
  'write.drive.kind': {
    label: 'Amplitude as', look: 'select', words: { current: { text: 'current' }, currentDensity: { text: 'current density' }, voltage: { text: 'voltage' } },
  },
  'write.waveform.kind': {
    label: 'Waveform', look: 'select', words: { single: { text: 'one pulse' }, train: { text: 'train of pulses' }, bipolar: { text: 'bipolar pair' }, points: { text: 'from points' } },
  },
  'start.kind': {
    label: 'Where trials start', look: 'radios', words: {
      well: { text: 'drawn from the well', note: 'Exactly from the Boltzmann distribution without drive.' },
      fixedAngle: { text: 'at a fixed angle', note: 'All at the same place; noise alone tells them apart.' },
      thermalised: { text: 'thermalised for a time', note: 'From the bottom of the well, without drive, before the pulse begins.' },
    },
  },
  'question.failureRule': {
    label: 'A write counts as failed', look: 'radios', words: {
      afterSettling: { text: 'after it has settled', note: 'After the pulse it comes back within 0.9 of the starting well before it reaches 0.9 of the other.' },
      atPulseEnd: { text: 'when the pulse ends', note: 'It is still on the starting side at the end of the pulse.' },
      neverCrossed: { text: 'by never crossing the equator', note: 'It never crossed while the pulse was on, wherever it ended.' },
    },
  },
  'numerics.step.kind': {
    label: 'Step', look: 'select', words: { automatic: { text: 'from the bias' }, fixed: { text: 'fixed' } },
  },
}

export const choiceForm = (path: ChoicePath): ChoiceForm => ({
  path, label: CHOICE_FORMS[path].label, look: CHOICE_FORMS[path].look,
  options: CHOICES[path].map((value): Option => ({ value, ...(CHOICE_FORMS[path].words as Record<string, Omit<Option, 'value'>>)[value]! })),
})

export const isChoice = (path: string): path is ChoicePath => Object.hasOwn(CHOICES, path)

export interface PartForm { title: string, rows: readonly string[], more?: readonly { title: string, rows: readonly string[] }[] }

const of = (part: SentencePart) => FIELDS.filter(field => field.part === part).map(field => field.path)
const TORQUE = ['device.fieldLikeRatio', 'device.fieldLikeQuadratic', 'device.referenceTilt']
const SHAPE = ['device.secondDiameter', 'device.shape', 'device.uniaxialField', 'device.strayField.x', 'device.strayField.y', 'device.strayField.z', 'device.pitch']
const VOLTAGE = ['device.voltageAnisotropy', 'device.barrierThickness', 'device.halfVoltage']
const HEAT = ['device.materialTemperature', 'device.magnetizationTemperature', 'device.anisotropyExponent', 'device.tmrSlope', 'device.thermalResistance']
const RARE = [...TORQUE, ...SHAPE, ...VOLTAGE, ...HEAT]
const SOURCE = ['write.seriesResistance', 'write.currentLimit']
const before = (rows: readonly string[], choice: ChoicePath, first: string) => rows.flatMap(path => path === first ? [choice, path] : [path])

/** The form of each part of the sentence: entries and choices in order. */
export const FORMS: Record<SentencePart, PartForm> = {
  question: { title: 'Question', rows: ['question.kind', ...of('question')] },
  device: {
    title: 'Free layer',
    rows: before(before(of('device').filter(path => !RARE.includes(path)), 'device.anisotropy.kind', 'device.anisotropy.anisotropyField'), 'device.torque.kind', 'device.torque.efficiency'),
    more: [
      { title: 'Field-like torque and tilt', rows: TORQUE },
      { title: 'Ellipse, in-plane and stray field', rows: SHAPE },
      { title: 'What the voltage does', rows: VOLTAGE },
      { title: 'Temperature laws and heating', rows: HEAT },
    ],
  },
  direction: { title: 'Direction', rows: ['write.direction'], more: [{ title: 'Where trials start', rows: ['start.kind', ...of('direction')] }] },
  drive: {
    title: 'Write pulse',
    rows: ['write.drive.kind', ...of('drive').filter(path => !SOURCE.includes(path) && !path.startsWith('write.waveform'))],
    more: [
      { title: 'Trains, bipolar pairs, points', rows: ['write.waveform.kind', ...of('drive').filter(path => path.startsWith('write.waveform'))] },
      { title: 'Access transistor', rows: SOURCE },
    ],
  },
  environment: { title: 'Surroundings', rows: of('environment') },
  counting: { title: 'Counting', rows: before(before(of('counting'), 'question.failureRule', 'numerics.seed'), 'numerics.step.kind', 'numerics.step.biasAllowed') },
}

/** Whether a row belongs to what is asked. */
export function rowIsAsked(path: string, choices: Choices): boolean {
  if (path === 'question.failureRule') return choices['question.kind'] !== 'motion'
  if (path === 'write.drive.kind') return choices['write.waveform.kind'] !== 'points'
  const field = FIELDS.find(one => one.path === path)
  return !field || isAsked(field, choices)
}
