import type { Device, Direction, Drive, FailureRule, JobSpec, Start, Write } from '../schemas/job'
import { formatCount } from './format'
import { formatPlain } from './quantity'

export type SentencePart = 'question' | 'device' | 'direction' | 'drive' | 'environment' | 'counting'
export interface SentencePiece { text: string, part?: SentencePart }

export const DIRECTION_WORDS: Record<Direction, string> = {
  parallelToAntiparallel: 'from parallel to antiparallel',
  antiparallelToParallel: 'from antiparallel to parallel',
}

/** In which words a failure is counted. */
export const RULE_WORDS: Record<FailureRule, string> = {
  afterSettling: 'after it has settled',
  atPulseEnd: 'when the pulse ends',
  neverCrossed: 'by never crossing the equator',
}

export const QUESTION_WORDS = { motion: 'How does it move?', switching: 'How fast does it switch?', failure: 'How often does the write fail?' } as const

/** Amplitude of a drive in the trade's unit. */
export function driveWords(drive: Drive): string {
  if (drive.kind === 'current') return formatPlain(drive.current, 'current', drive.current >= 1e-3 ? 'mA' : 'µA')
  if (drive.kind === 'currentDensity') return formatPlain(drive.currentDensity, 'currentDensity', 'MA/cm2')
  return formatPlain(drive.voltage, 'voltage', 'V')
}

const timeWords = (t: number) => t === 0 ? formatPlain(0, 'time', 'ns') : t >= 1e-6 ? formatPlain(t, 'time', 'µs') : t < 1e-10 ? formatPlain(t, 'time', 'ps') : formatPlain(t, 'time', 'ns')

/** What follows the first pulse, or stands in its place. */
function waveformWords({ waveform }: Write): string[] {
  if (!waveform) return []
  if (waveform.kind === 'train') return [`${formatCount(waveform.pulses)} pulses every ${timeWords(waveform.period)}`]
  if (waveform.kind === 'points') return [`along ${formatCount(waveform.time.length)} points`]
  return [`then ${formatPlain(-waveform.reverseRatio, 'ratio', '%')} for ${timeWords(waveform.reverseWidth)}`]
}

/** "28 nm", "100 × 40 nm in plane" */
export function sizeWords({ diameter, secondDiameter, anisotropy }: Device): string {
  const size = secondDiameter === undefined || secondDiameter === diameter
    ? formatPlain(diameter, 'length', 'nm')
    : `${formatPlain(diameter, 'length', 'nm').replace(/\s*nm$/u, '')} × ${formatPlain(secondDiameter, 'length', 'nm')}`
  return anisotropy.kind === 'inPlane' ? `${size} in plane` : size
}

/** Where trials start, when it is not the well. */
function startWords(start: Start | undefined): string {
  if (!start) return ''
  return start.kind === 'fixedAngle' ? `, started at ${formatPlain(start.angle, 'angle', '°')},` : `, thermalised for ${timeWords(start.duration)},`
}

function environmentWords({ environment }: JobSpec): string {
  const { x, y, z } = environment.appliedField
  const celsius = formatPlain(environment.temperature, 'temperature', '°C')
  const parts = Object.entries({ x, y, z }).filter(([, h]) => h !== 0).map(([axis, h]) => `${formatPlain(h, 'field', 'mT')} along ${axis}`)
  return parts.length === 0 ? celsius : `${celsius} in ${parts.join(' and ')}`
}

/** "cell Q-28"; a name that says itself that it is a cell or a device keeps its own words. */
export const cellWords = (label: string): string => /\b(?:cell|device|stack|bit|junction)\b/i.test(label) ? label : `cell ${label}`

/** The job as a sentence in pieces; a piece with a `part` is a control on the bench. */
export function sentencePieces(spec: JobSpec): SentencePiece[] {
  const { device, write, question } = spec
  const width = question.kind === 'failure' ? `${timeWords(question.shortest)} to ${timeWords(write.width)}` : timeWords(write.waveform?.kind === 'points' ? Number(write.width.toPrecision(4)) : write.width)
  const pulse = [driveWords(write.drive), width, ...(write.edge > 0 ? [`${timeWords(write.edge)} edges`] : []), ...waveformWords(write)].join(', ')
  const common: SentencePiece[] = [
    { text: `${DIRECTION_WORDS[write.direction]}${startWords(spec.start)}`, part: 'direction' },
    { text: ' under ' },
    { text: pulse, part: 'drive' },
    { text: ' at ' },
    { text: environmentWords(spec), part: 'environment' },
  ]
  const cell: SentencePiece = { text: `${cellWords(device.label)}, ${sizeWords(device)}`, part: 'device' }
  if (question.kind === 'motion') {
    return [
      { text: 'How', part: 'question' }, { text: ' does ' }, cell, { text: ' move ' }, ...common,
      { text: ', on ' }, { text: `${formatCount(question.paths)} ${question.paths === 1 ? 'path' : 'paths'} with noise`, part: 'counting' }, { text: '?' },
    ]
  }
  if (question.kind === 'failure') {
    return [
      { text: 'How often', part: 'question' }, { text: ' does ' }, cell, { text: ' fail to switch ' }, ...common,
      { text: ', checked by ' }, { text: `${formatCount(question.trials)} trials at each of ${formatCount(question.widths)} widths`, part: 'counting' }, { text: '?' },
    ]
  }
  return [
    { text: 'How fast', part: 'question' }, { text: ' does ' }, cell, { text: ' switch ' }, ...common,
    { text: ', over ' }, { text: `${formatCount(question.trials)} trials`, part: 'counting' }, { text: '?' },
  ]
}

/** The sentence as one string: title of a job in tables, mails and the page title. */
export const sentence = (spec: JobSpec): string => sentencePieces(spec).map(piece => piece.text).join('')
