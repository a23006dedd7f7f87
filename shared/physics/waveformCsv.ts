import type { Drive, JobSpec, Waveform } from '../schemas/job'
import { LIMITS } from '../schemas/job'
import type { Dimension } from '../schemas/quantities'
import { DIMENSIONS } from '../schemas/quantities'
import { fromUnit, toUnit } from '../utils/quantity'
import { halfAmplitudes } from './waveform'

/** What two columns say: the drive at its largest, the waveform in multiples of it, and the width between half amplitudes. */
export interface ReadWaveform { drive: Drive, width: number, waveform: Extract<Waveform, { kind: 'points' }> }
/** `row` counts lines of the text from 1. */
export interface RowFault { row: number, message: string }
export type WaveformReading = { ok: true, value: ReadWaveform } | { ok: false, faults: RowFault[] }

const MOST_FAULTS = 12
const DRIVES = ['voltage', 'current', 'currentDensity'] as const
const NUMBER = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/

const fold = (text: string) => text.trim().replace(/[\u00B5\u03BC]/g, 'µ').replace(/²/g, '2').replace(/^u(?=[AsV])/, 'µ')

function unitAmong(text: string, dimensions: readonly Dimension[]): { dimension: Dimension, unit: string } | null {
  for (const dimension of dimensions) {
    const unit = DIMENSIONS[dimension].units.find(({ id, label }) => fold(id) === fold(text) || fold(label) === fold(text))
    if (unit) return { dimension, unit: unit.id }
  }
  return null
}

/** "voltage (mV)" → mV */
const unitOf = (heading: string) => /[([]\s*([^)\]]+?)\s*[)\]]\s*$/.exec(heading.trim())?.[1] ?? null

/**
 * Reads a piecewise-linear waveform from two columns, time and drive, separated by commas, semicolons or tabs. The first line names both with
 * their units in brackets: "time (ns), voltage (V)". Positive values drive in the direction of the write. Empty lines and lines that begin
 * with # are passed over. Faults are answered by row.
 */
export function readWaveformCsv(text: string): WaveformReading {
  const lines = text.split(/\r\n|\r|\n/).map((line, k) => ({ row: k + 1, text: line.trim() })).filter(line => line.text !== '' && !line.text.startsWith('#'))
  const fault = (row: number, message: string): WaveformReading => ({ ok: false, faults: [{ row, message }] })
  const head = lines[0]
  if (!head) return fault(1, 'Paste two columns, the first line naming them with units: time (ns), voltage (V).')
  const separator = ['\t', ';', ','].find(one => head.text.includes(one))
  const headings = separator === undefined ? [] : head.text.split(separator)
  if (separator === undefined || headings.length !== 2) return fault(head.row, 'The first line names two columns, separated by a comma, a semicolon or a tab: time (ns), voltage (V).')
  const [timeUnit, driveUnit] = headings.map(unitOf)
  const time = timeUnit ? unitAmong(timeUnit, ['time']) : null
  if (!time) return fault(head.row, `The first column needs a unit of time in brackets: ${DIMENSIONS.time.units.map(unit => unit.label).join(', ')}.`)
  const drive = driveUnit ? unitAmong(driveUnit, DRIVES) : null
  if (!drive) return fault(head.row, `The second column needs its unit in brackets: ${DRIVES.flatMap(one => DIMENSIONS[one].units.map(unit => unit.label)).join(', ')}.`)

  const faults: RowFault[] = []
  const times: number[] = []
  const values: number[] = []
  for (const { row, text: line } of lines.slice(1)) {
    if (faults.length >= MOST_FAULTS) break
    const cells = line.split(separator).map(cell => cell.trim().replace(/\u2212/g, '-'))
    if (cells.length !== 2) faults.push({ row, message: `Two columns are needed, here are ${cells.length}.` })
    else if (!cells.every(cell => NUMBER.test(cell) && Number.isFinite(Number(cell)))) faults.push({ row, message: `“${cells.find(cell => !NUMBER.test(cell)) ?? cells[0]!}” is not a number; the decimal sign is a point.` })
    else {
      const t = fromUnit(Number(cells[0]), 'time', time.unit)
      if (times.length > 0 && t < times[times.length - 1]!) faults.push({ row, message: 'This time lies before the one above.' })
      times.push(t)
      values.push(fromUnit(Number(cells[1]), drive.dimension, drive.unit))
    }
  }
  if (faults.length > 0) return { ok: false, faults }
  if (times.length < 2) return fault(head.row, 'At least two points are needed.')
  if (times.length > LIMITS.waveformPoints) return fault(lines[LIMITS.waveformPoints + 1]!.row, `At most ${LIMITS.waveformPoints} points are taken; here are ${times.length}.`)
  const largest = Math.max(...values.map(Math.abs))
  if (largest === 0) return fault(head.row, 'The drive is zero throughout.')
  const amplitude = values.map(value => value / largest)
  const { first, last } = halfAmplitudes(times, amplitude)
  if (!(last > first)) return fault(head.row, 'The drive never stays above half of its amplitude.')
  return { ok: true, value: { drive: driveOf(drive.dimension, largest), width: last - first, waveform: { kind: 'points', time: times, amplitude } } }
}

function driveOf(dimension: Dimension, amplitude: number): Drive {
  if (dimension === 'voltage') return { kind: 'voltage', voltage: amplitude }
  return dimension === 'current' ? { kind: 'current', current: amplitude } : { kind: 'currentDensity', currentDensity: amplitude }
}

const HEADINGS = { voltage: ['voltage', 'V'], current: ['current', 'µA'], currentDensity: ['current density', 'MA/cm2'] } as const

/** The two columns that read back as the waveform of a specification; empty where it has none from points. */
export function waveformCsv({ write: { drive, waveform } }: Pick<JobSpec, 'write'>): string {
  if (waveform?.kind !== 'points') return ''
  const [name, unit] = HEADINGS[drive.kind]
  const largest = drive.kind === 'voltage' ? drive.voltage : drive.kind === 'current' ? drive.current : drive.currentDensity
  const rows = waveform.time.map((t, k) => `${toUnit(t, 'time', 'ns')}, ${toUnit(waveform.amplitude[k]! * largest, drive.kind, unit)}`)
  return [`time (ns), ${name} (${unit})`, ...rows].join('\n')
}
