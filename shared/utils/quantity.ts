import type { Dimension, Unit } from '../schemas/quantities'
import { DIMENSIONS } from '../schemas/quantities'
import { formatNumber, THIN } from './format'

const unitsOf = (dimension: Dimension): readonly Unit[] => DIMENSIONS[dimension].units

/** The unit of that id; the dimension's first when there is none. */
export function findUnit(dimension: Dimension, id?: string): Unit {
  return unitsOf(dimension).find(unit => unit.id === id) ?? unitsOf(dimension)[0]!
}

/** SI value in a unit, rounded to the fifteen figures that a double holds, so that 0.34 T reads 340 mT. */
export function toUnit(si: number, dimension: Dimension, unitId?: string): number {
  const unit = findUnit(dimension, unitId)
  return Number(((si - (unit.offset ?? 0)) / unit.factor).toPrecision(13))
}

export function fromUnit(value: number, dimension: Dimension, unitId?: string): number {
  const unit = findUnit(dimension, unitId)
  return Number((value * unit.factor + (unit.offset ?? 0)).toPrecision(15))
}

export type ParsedQuantity = { ok: true, value: number, unit: string } | { ok: false, error: string }

/** Spellings of units as people type them, folded: case of SI prefixes is kept, micro and angstrom signs and powers unified. */
const fold = (text: string) => text.trim()
  .replace(/[\u00B5\u03BC]/g, 'u').replace(/^µ/, 'u').replace(/\u212B/g, 'Å').replace(/\u2126/g, 'Ω')
  .replace(/²/g, '2').replace(/³/g, '3').replace(/\^/g, '').replace(/[·*\s]/g, '').replace(/[ºo]C$/, '°C')
const ALIASES: Record<string, string> = { 'deg': '°', 'degC': '°C', 'C': '°C', 'A': 'A', 'angstrom': 'Å', 'percent': '%', 'ohm·um2': 'Ω·µm2', 'ohmum2': 'Ωum2', 'Ohmum2': 'Ωum2' }

/**
 * Reads what people type: "1 050", "3.4e3", "3400 Oe", "−20", "1,5" is refused as ambiguous. A unit after the number wins over `unitId`.
 * Returns SI, or an error in words.
 */
export function parseQuantity(text: string, dimension: Dimension, unitId?: string): ParsedQuantity {
  const trimmed = text.replace(/[\u2212\u2013]/g, '-').replace(/[\u202F\u00A0\u2009]/g, ' ').trim()
  if (trimmed === '') return { ok: false, error: 'Enter a number.' }
  const match = /^([+-]?(?:\d[\d ]*(?:\.\d*)?|\.\d+)(?:\s*[eE]\s*[+-]?\d+|\s*[×x]\s*10\^?\s*[+-]?\d+)?)\s*(.*)$/.exec(trimmed)
  if (!match) return { ok: false, error: `“${text.trim()}” is not a number.` }
  const rest = match[2]!.trim()
  if (/^[,;]\d/.test(rest)) return { ok: false, error: 'Write the decimal sign as a point and group digits with spaces.' }
  let unit = findUnit(dimension, unitId)
  if (rest !== '') {
    const wanted = fold(ALIASES[fold(rest)] ?? rest)
    const units = unitsOf(dimension)
    const found = units.find(u => fold(u.id) === wanted || fold(u.label) === wanted) ?? units.find(u => fold(u.id).toLowerCase() === wanted.toLowerCase() && units.filter(o => fold(o.id).toLowerCase() === wanted.toLowerCase()).length === 1)
    if (!found) {
      const known = units.map(u => u.label).filter(Boolean).join(', ')
      return { ok: false, error: known ? `“${rest}” is no unit for this; use ${known}.` : `Leave out “${rest}”: this is a plain number.` }
    }
    unit = found
  }
  const number = Number(match[1]!.replace(/\s*[×x]\s*10\^?\s*/, 'e').replace(/ /g, ''))
  if (!Number.isFinite(number)) return { ok: false, error: `“${text.trim()}” is too large.` }
  const value = fromUnit(number, dimension, unit.id)
  return { ok: true, value: value === 0 ? 0 : value, unit: unit.id }
}

/** SI value in a unit with its label: "340 mT". */
export function formatQuantity(si: number, dimension: Dimension, unitId?: string, digits = 4): string {
  const unit = findUnit(dimension, unitId)
  const figure = formatNumber(toUnit(si, dimension, unit.id), digits)
  if (unit.label === '') return figure
  return unit.label === '°' ? `${figure}°` : `${figure}${THIN}${unit.label}`
}

/** As typed: all figures that matter and no more ("0.3 ns", "1050 kA/m"). */
export function formatPlain(si: number, dimension: Dimension, unitId?: string): string {
  const unit = findUnit(dimension, unitId)
  const value = Number(toUnit(si, dimension, unit.id).toPrecision(7))
  const figure = Math.abs(value) >= 1e6 || (value !== 0 && Math.abs(value) < 1e-4) ? formatNumber(value, 4) : String(value).replace('-', '−').replace(/^(−?)(\d{5,})/, (_, sign: string, whole: string) => sign + whole.replace(/\B(?=(\d{3})+$)/g, THIN))
  if (unit.label === '') return figure
  return unit.label === '°' ? `${figure}°` : `${figure}${THIN}${unit.label}`
}

const PREFIXES: readonly [number, string][] = [[1e12, 'T'], [1e9, 'G'], [1e6, 'M'], [1e3, 'k'], [1, ''], [1e-3, 'm'], [1e-6, 'µ'], [1e-9, 'n'], [1e-12, 'p'], [1e-15, 'f'], [1e-18, 'a'], [1e-21, 'z']]

/** SI value with an SI prefix, where the unit takes one: "270.6 kA/m". Powers of units are written with a power of ten. */
export function formatPrefixed(si: number, unit: string, digits = 4): string {
  if (si === 0 || !Number.isFinite(si)) return `${formatNumber(si, digits)}${THIN}${unit}`
  if (unit === '') return formatNumber(si, digits)
  const magnitude = Math.abs(si)
  const prefix = PREFIXES.find(([factor]) => magnitude >= factor * 0.99999) ?? PREFIXES[PREFIXES.length - 1]!
  return `${formatNumber(si / prefix[0], digits)}${THIN}${prefix[1]}${unit}`
}

/** The coherent SI value beside an input: "2.706 × 10⁵ A/m" as "270.6 kA/m"; units with a power stay unprefixed. */
export function formatSi(si: number, dimension: Dimension, digits = 4): string {
  const unit = DIMENSIONS[dimension].si
  if (unit === '') return formatNumber(si, digits)
  if (/[²³]/.test(unit)) return `${formatNumber(si, digits)}${THIN}${unit}`
  return unit === 'K' || unit === 'rad' ? `${formatNumber(si, digits)}${THIN}${unit}` : formatPrefixed(si, unit, digits)
}
