import { z } from 'zod'
import { jobSpecSchema, SPEC_VERSION, type Device, type JobSpec } from '#shared/schemas/job'
import { fromUnit } from '#shared/utils/quantity'
import { readWaveformCsv, waveformCsv } from '#shared/physics/waveformCsv'
import type { SentencePart } from '#shared/utils/sentence'
import { CHOICES, FIELDS, isAsked, LEFT_OUT, locate, type ChoicePath, type Choices, type Field } from './fields'
import { readEntry, typedNumber, typedQuantity } from './entry'

/** What is on the bench, as typed: texts and units by path, whether they make sense or not. */
export interface Draft { choices: Choices, texts: Record<string, string>, units: Record<string, string> }

const choicesSchema = z.strictObject({
  'question.kind': z.enum(CHOICES['question.kind']),
  'device.anisotropy.kind': z.enum(CHOICES['device.anisotropy.kind']),
  'device.shape': z.enum(CHOICES['device.shape']).default('cylinder'),
  'device.torque.kind': z.enum(CHOICES['device.torque.kind']),
  'write.direction': z.enum(CHOICES['write.direction']),
  'write.drive.kind': z.enum(CHOICES['write.drive.kind']),
  'write.waveform.kind': z.enum(CHOICES['write.waveform.kind']).default('single'),
  'start.kind': z.enum(CHOICES['start.kind']).default('well'),
  'question.failureRule': z.enum(CHOICES['question.failureRule']),
  'numerics.step.kind': z.enum(CHOICES['numerics.step.kind']),
})

/** Shape of a kept draft. */
export const draftSchema: z.ZodType<Draft> = z.strictObject({
  choices: choicesSchema, texts: z.record(z.string(), z.string().max(400_000)), units: z.record(z.string(), z.string().max(20)),
})

/** Something that keeps the draft from being asked. `path` is the entry at fault, null where a whole part is. */
export interface Issue { path: string | null, part: SentencePart, message: string }

/** A draft read: the specification where it is one, the faults otherwise, and the nearest thing to it that words can show. */
export interface Reading { spec: JobSpec | null, issues: Issue[], shown: JobSpec }

type Raw = { [key: string]: Raw | string | number | number[] }

function put(target: Raw, path: string, value: Raw[string]) {
  const keys = path.split('.')
  let at = target
  for (const key of keys.slice(0, -1)) {
    const next = at[key]
    at = typeof next === 'object' && !Array.isArray(next) ? next : (at[key] = {})
  }
  at[keys[keys.length - 1]!] = value
}

function valueAt(spec: JobSpec, path: string): string | number | undefined {
  let at: unknown = spec
  for (const key of path.split('.')) at = typeof at === 'object' && at !== null ? (at as Record<string, unknown>)[key] : undefined
  return typeof at === 'string' || typeof at === 'number' ? at : undefined
}

const choiceIsAsked = (path: ChoicePath, choices: Choices) => path !== 'question.failureRule' || choices['question.kind'] !== 'motion'

/**
 * Reads a draft strictly. Entries at fault take their value from `fallback` in `shown`, so that the sentence still reads.
 */
export function readDraft(draft: Draft, fallback: JobSpec): Reading {
  const raw: Raw = { schemaVersion: SPEC_VERSION }
  const best: Raw = { schemaVersion: SPEC_VERSION }
  const issues: Issue[] = []
  for (const [path, value] of Object.entries(draft.choices) as [ChoicePath, string][]) {
    if (!choiceIsAsked(path, draft.choices) || LEFT_OUT[path] === value) continue
    put(raw, path, value)
    put(best, path, value)
  }
  for (const field of FIELDS) {
    if (!isAsked(field, draft.choices)) continue
    const text = draft.texts[field.path] ?? ''
    if (field.optional && text.trim() === '') continue
    const read = readEntry(field, text, draft.units[field.path])
    if (field.kind === 'points') {
      if (!read.ok) issues.push({ path: field.path, part: field.part, message: read.error })
      putPoints(raw, best, text, fallback)
      continue
    }
    if (read.ok) put(raw, field.path, read.value)
    else issues.push({ path: field.path, part: field.part, message: read.error })
    put(best, field.path, read.ok ? read.value : valueAt(fallback, field.path) ?? valueAt(DEFAULT_SPEC, field.path) ?? smallest(field))
  }
  const shown = best as unknown as JobSpec
  if (issues.length > 0) return { spec: null, issues, shown }
  const parsed = jobSpecSchema.safeParse(raw)
  if (parsed.success) return { spec: parsed.data, issues, shown: parsed.data }
  return { spec: null, shown, issues: parsed.error.issues.map(issue => ({ ...locate(issue.path.map(key => typeof key === 'symbol' ? String(key) : key), draft.choices), message: issue.message })) }
}

/** Two columns bring the drive's kind and amplitude and the width with them. While they are at fault the sentence keeps its last good pulse. */
function putPoints(raw: Raw, best: Raw, text: string, fallback: JobSpec) {
  const read = readWaveformCsv(text)
  const { drive, width, waveform } = read.ok ? read.value : fallback.write
  for (const target of [raw, best]) {
    put(target, 'write.drive', { ...drive })
    put(target, 'write.width', width)
    put(target, 'write.edge', 0)
    if (read.ok && waveform?.kind === 'points') put(target, 'write.waveform', { ...waveform })
    else if (typeof target.write === 'object' && !Array.isArray(target.write)) delete target.write.waveform
  }
}

const smallest = (field: Field): string | number => field.kind === 'name' || field.kind === 'points' ? field.label : Math.max(0, field.min)

/** A draft that says what a specification says. Units that were chosen before, and texts of entries not asked now, stay. */
export function draftFromSpec(spec: JobSpec, before?: Draft): Draft {
  const draft: Draft = { choices: { ...(before?.choices ?? DEFAULT_CHOICES) }, texts: { ...before?.texts }, units: { ...before?.units } }
  for (const path of Object.keys(CHOICES) as ChoicePath[]) {
    const value = valueAt(spec, path)
    if (typeof value === 'string') Object.assign(draft.choices, { [path]: value })
    else if (LEFT_OUT[path]) Object.assign(draft.choices, { [path]: LEFT_OUT[path] })
  }
  fill(draft, spec, () => true)
  return draft
}

/** The draft with another device; everything else stays as typed. */
export function withDevice(draft: Draft, device: Device): Draft {
  const spec: JobSpec = { ...DEFAULT_SPEC, device }
  const next: Draft = {
    choices: { ...draft.choices, 'device.anisotropy.kind': device.anisotropy.kind, 'device.torque.kind': device.torque.kind, 'device.shape': device.shape ?? 'cylinder' },
    texts: { ...draft.texts }, units: { ...draft.units },
  }
  fill(next, spec, field => field.part === 'device')
  return next
}

function fill(draft: Draft, spec: JobSpec, wanted: (field: Field) => boolean) {
  for (const field of FIELDS) {
    if (field.kind === 'quantity') draft.units[field.path] ??= field.unit
    if (!wanted(field)) continue
    const value = valueAt(spec, field.path)
    if (field.kind === 'points') draft.texts[field.path] = waveformCsv(spec) || (draft.texts[field.path] ?? '')
    else if (typeof value === 'string') draft.texts[field.path] = value
    else if (value === undefined && field.optional) draft.texts[field.path] = ''
    else if (value !== undefined) draft.texts[field.path] = field.kind === 'quantity' ? typedQuantity(value, field.dimension, draft.units[field.path]!) : typedNumber(value)
    else draft.texts[field.path] ??= ''
  }
}

/** The device on the bench where all of its entries make sense. */
export function deviceOf(draft: Draft): Device | null {
  return FIELDS.every(field => field.part !== 'device' || !isAsked(field, draft.choices) || (field.optional && (draft.texts[field.path] ?? '').trim() === '') || readEntry(field, draft.texts[field.path] ?? '', draft.units[field.path]).ok)
    ? readDraft(draft, DEFAULT_SPEC).shown.device
    : null
}

/** What the bench starts with: a perpendicular cell and a write well above its critical current. The seed is drawn on arrival. */
export const DEFAULT_SPEC: JobSpec = jobSpecSchema.parse({
  question: { kind: 'switching', trials: 10_000 },
  device: {
    label: 'Q-28', damping: 0.008, saturationMagnetization: 1.05e6,
    anisotropy: { kind: 'effectiveField', anisotropyField: fromUnit(340, 'field', 'mT') },
    thickness: 1.4e-9, diameter: 28e-9, exchangeStiffness: 18e-12, torque: { kind: 'constant', efficiency: 0.55 },
    resistanceArea: 6e-12, tunnelMagnetoresistance: 1.4,
  },
  environment: { temperature: 358.15 },
  write: { direction: 'parallelToAntiparallel', drive: { kind: 'current', current: 62e-6 }, width: 10e-9, edge: 0.3e-9 },
  numerics: { seed: 1 },
})

const DEFAULT_CHOICES: Choices = {
  'question.kind': 'switching', 'device.anisotropy.kind': 'effectiveField', 'device.torque.kind': 'constant', 'write.direction': 'parallelToAntiparallel',
  'write.drive.kind': 'current', 'question.failureRule': 'afterSettling', 'device.shape': 'cylinder', 'write.waveform.kind': 'single', 'start.kind': 'well', 'numerics.step.kind': 'automatic',
}

/** Entries that the default question does not ask, ready for the moment somebody turns to them. */
const AT_HAND: Record<string, string> = {
  'question.after': '0', 'question.paths': '24', 'question.shortest': '2', 'question.widths': '6', 'question.target': '1e-9', 'device.anisotropy.interfaceAnisotropy': '1.2', 'device.torque.polarization': '0.6', 'device.torque.asymmetry': '1.5',
  'write.drive.currentDensity': '10', 'write.drive.voltage': '0.6', 'numerics.step.step': '2',
  'write.waveform.pulses': '3', 'write.waveform.period': '20', 'write.waveform.reverseRatio': '50', 'write.waveform.reverseWidth': '3', 'write.waveform.gap': '1',
  'write.waveform.points': 'time (ns), current (µA)\n0, 0\n0.3, 62\n6, 62\n8, 20\n10, 0', 'start.angle': '5', 'start.azimuth': '0', 'start.duration': '5',
}

/** The draft that a bench without a kept one shows. */
export function defaultDraft(seed: number): Draft {
  const draft = draftFromSpec({ ...DEFAULT_SPEC, numerics: { ...DEFAULT_SPEC.numerics, seed } })
  draft.units['device.anisotropy.anisotropyField'] = 'Oe'
  draft.texts['device.anisotropy.anisotropyField'] = '3 400'
  for (const [path, text] of Object.entries(AT_HAND)) draft.texts[path] = text
  return draft
}

/** A seed nobody has chosen, 0 to 2³² − 1. */
export const drawSeed = (): number => crypto.getRandomValues(new Uint32Array(1))[0]!
