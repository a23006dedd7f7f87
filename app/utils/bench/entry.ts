import { findUnit, formatPlain, formatQuantity, formatSi, parseQuantity, toUnit } from '#shared/utils/quantity'
import { formatCount } from '#shared/utils/format'
import { readWaveformCsv } from '#shared/physics/waveformCsv'
import type { Dimension } from '#shared/schemas/quantities'
import type { Field } from './fields'

export type EntryValue = { ok: true, value: number | string, unit: string | null } | { ok: false, error: string }

/** What an entry's text says, in SI, checked against the entry's limits. Errors are whole sentences in the entry's own unit. */
export function readEntry(field: Field, text: string, unit: string | undefined): EntryValue {
  if (field.kind === 'name') {
    const name = text.trim()
    if (name === '') return { ok: false, error: 'Give it a name.' }
    return name.length > field.longest ? { ok: false, error: `At most ${field.longest} characters.` } : { ok: true, value: name, unit: null }
  }
  if (field.kind === 'points') {
    const read = readWaveformCsv(text)
    return read.ok ? { ok: true, value: text, unit: null } : { ok: false, error: read.faults.map(({ row, message }) => `Row ${row}: ${message}`).join(' ') }
  }
  const parsed = parseQuantity(text, field.kind === 'count' ? 'number' : field.dimension, unit)
  if (!parsed.ok) return parsed
  if (field.kind === 'count') {
    if (!Number.isInteger(parsed.value)) return { ok: false, error: 'Enter a whole number.' }
    if (parsed.value < field.min) return { ok: false, error: `At least ${formatCount(field.min)}.` }
    if (parsed.value > field.max) return { ok: false, error: `At most ${formatCount(field.max)}.` }
    return { ok: true, value: parsed.value, unit: null }
  }
  // A limit typed with the figures shown may come out a rounding error beyond it; it is then the limit.
  const slack = 1e-6
  if (parsed.value < field.min - Math.abs(field.min) * slack) return { ok: false, error: `At least ${formatPlain(field.min, field.dimension, parsed.unit)}.` }
  if (parsed.value > field.max + Math.abs(field.max) * slack) return { ok: false, error: `At most ${formatPlain(field.max, field.dimension, parsed.unit)}.` }
  return { ok: true, value: Math.min(field.max, Math.max(field.min, parsed.value)), unit: parsed.unit }
}

const group = (digits: string) => digits.length < 4 ? digits : digits.replace(/\B(?=(\d{3})+$)/g, ' ')

/** A number as a person would type it: "1 050", "0.008", "3.4e-7". Reads back to the same value. */
export function typedNumber(value: number, places?: number): string {
  const magnitude = Math.abs(value)
  const sign = value < 0 ? '−' : ''
  if (magnitude !== 0 && (magnitude < 1e-5 || magnitude >= 1e9)) return sign + String(Number(magnitude.toPrecision(10)))
  const plain = places === undefined ? String(Number(magnitude.toPrecision(10))) : magnitude.toFixed(Math.min(places, 20))
  const [whole, fraction] = plain.split('.') as [string, string | undefined]
  return sign + group(whole) + (fraction === undefined ? '' : `.${fraction}`)
}

/** An SI value as typed in a unit, without the unit. */
export const typedQuantity = (si: number, dimension: Dimension, unit: string): string => typedNumber(toUnit(si, dimension, unit))

const NUMBER = /^\s*[+\-−]?(?:\d[\d ]*(?:\.\d*)?|\.\d+)(?:\s*[eE]\s*[+\-−]?\d+|\s*[×x]\s*10\^?\s*[+\-−]?\d+)?/u

/** The text without the unit typed after its number; the text itself where it starts with no number. */
export const withoutUnit = (text: string): string => NUMBER.exec(text.replace(/[\u202F\u00A0\u2009]/g, ' '))?.[0].trimEnd() ?? text

/**
 * The text one step up or down: the second significant figure moves by one, ten of them with `coarse`; whole numbers by at least one.
 * Stays inside the entry's limits. Null where the text is no number.
 */
export function nudged(field: Field, text: string, unit: string | undefined, direction: 1 | -1, coarse = false): string | null {
  if (field.kind === 'name' || field.kind === 'points') return null
  const dimension = field.kind === 'count' ? 'number' : field.dimension
  const parsed = parseQuantity(text, dimension, unit)
  if (!parsed.ok) return null
  const shown = toUnit(parsed.value, dimension, parsed.unit)
  const least = field.kind === 'count' ? 1 : 0
  const decade = shown === 0 ? 1 : 10 ** (Math.floor(Math.log10(Math.abs(shown)) + 1e-9) - 1)
  const step = Math.max(least, decade) * (coarse ? 10 : 1)
  const places = Math.max(0, -Math.floor(Math.log10(step) + 1e-9))
  const typedPlaces = /\.(\d+)/.exec(text)?.[1]?.length ?? 0
  const limit = (si: number) => toUnit(si, dimension, parsed.unit)
  const wanted = shown + direction * step
  const next = Math.min(limit(field.max), Math.max(limit(field.min), wanted))
  // A limit has figures of its own; tiny numbers keep their power of ten.
  const free = next !== wanted || (next !== 0 && Math.abs(next) < 1e-5)
  const typed = typedNumber(Number(next.toPrecision(12)), free ? undefined : Math.max(places, typedPlaces))
  const bare = withoutUnit(text)
  return typed + text.slice(bare.length)
}

/** For each dimension the unit that people also think in, given the one that they typed. */
const ALSO: Partial<Record<Dimension, readonly string[]>> = {
  field: ['T', 'Oe', 'mT'], magnetization: ['emu/cm3', 'kA/m'], length: ['Å', 'nm'], time: ['ps', 'ns'], current: ['µA', 'mA'],
  currentDensity: ['MA/cm2', 'A/cm2'], voltage: ['mV', 'V'], exchange: ['µerg/cm', 'pJ/m'], interfaceEnergy: ['erg/cm2', 'mJ/m2'], resistanceArea: ['Ω·µm2'],
  temperature: ['°C'], angle: ['°'], ratio: ['%', '1'],
}

/** The line under an entry: its value in another common unit and in SI, and what it means. "= 0.340 T · 270.6 kA/m. Shape included." */
export function siLine(field: Field, text: string, unit: string | undefined): string {
  if (field.kind !== 'quantity') return ''
  const parsed = parseQuantity(text, field.dimension, unit)
  if (!parsed.ok) return field.hint ?? ''
  const plain = (words: string) => words.replace(/\u202F/g, ' ')
  const typed = plain(formatQuantity(parsed.value, field.dimension, parsed.unit))
  const also = ALSO[field.dimension]?.filter(id => id !== parsed.unit && findUnit(field.dimension, id).id === id).slice(0, 1) ?? []
  const forms = [...also.map(id => formatQuantity(parsed.value, field.dimension, id)), ...(field.dimension === 'ratio' ? [] : [formatSi(parsed.value, field.dimension)])]
  const different = forms.filter((form, k) => plain(form) !== typed && forms.findIndex(other => plain(other) === plain(form)) === k)
  const values = different.length === 0 || field.dimension === 'number' ? '' : `= ${different.join(' · ')}`
  return [values, field.hint].filter(Boolean).join(values.endsWith('.') ? ' ' : '. ')
}
