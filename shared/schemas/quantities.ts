import { z } from 'zod'

/**
 * Units people type, by dimension. `factor` and `offset` give SI: si = value * factor + offset.
 * Field units in tesla or oersted mean the flux density or field that corresponds to H in A/m in vacuum.
 */
export interface Unit { id: string, label: string, factor: number, offset?: number, ucum: string }

const OERSTED = 1000 / (4 * Math.PI)
const PER_TESLA = 1 / 1.25663706127e-6

export const DIMENSIONS = {
  ratio: { si: '', units: [{ id: '1', label: '', factor: 1, ucum: '1' }, { id: '%', label: '%', factor: 0.01, ucum: '%' }] },
  number: { si: '', units: [{ id: '1', label: '', factor: 1, ucum: '1' }] },
  magnetization: { si: 'A/m', units: [
    { id: 'kA/m', label: 'kA/m', factor: 1e3, ucum: 'kA/m' },
    { id: 'MA/m', label: 'MA/m', factor: 1e6, ucum: 'MA/m' },
    { id: 'A/m', label: 'A/m', factor: 1, ucum: 'A/m' },
    { id: 'emu/cm3', label: 'emu/cm³', factor: 1e3, ucum: '[emu]/cm3' },
    { id: 'T', label: 'T', factor: PER_TESLA, ucum: 'T' },
  ] },
  field: { si: 'A/m', units: [
    { id: 'mT', label: 'mT', factor: PER_TESLA * 1e-3, ucum: 'mT' },
    { id: 'T', label: 'T', factor: PER_TESLA, ucum: 'T' },
    { id: 'Oe', label: 'Oe', factor: OERSTED, ucum: 'Oe' },
    { id: 'kOe', label: 'kOe', factor: OERSTED * 1e3, ucum: 'kOe' },
    { id: 'kA/m', label: 'kA/m', factor: 1e3, ucum: 'kA/m' },
    { id: 'A/m', label: 'A/m', factor: 1, ucum: 'A/m' },
  ] },
  length: { si: 'm', units: [
    { id: 'nm', label: 'nm', factor: 1e-9, ucum: 'nm' },
    { id: 'Å', label: 'Å', factor: 1e-10, ucum: 'Ao' },
    { id: 'm', label: 'm', factor: 1, ucum: 'm' },
  ] },
  time: { si: 's', units: [
    { id: 'ns', label: 'ns', factor: 1e-9, ucum: 'ns' },
    { id: 'ps', label: 'ps', factor: 1e-12, ucum: 'ps' },
    { id: 'µs', label: 'µs', factor: 1e-6, ucum: 'us' },
    { id: 's', label: 's', factor: 1, ucum: 's' },
  ] },
  temperature: { si: 'K', units: [
    { id: '°C', label: '°C', factor: 1, offset: 273.15, ucum: 'Cel' },
    { id: 'K', label: 'K', factor: 1, ucum: 'K' },
  ] },
  current: { si: 'A', units: [
    { id: 'µA', label: 'µA', factor: 1e-6, ucum: 'uA' },
    { id: 'mA', label: 'mA', factor: 1e-3, ucum: 'mA' },
    { id: 'A', label: 'A', factor: 1, ucum: 'A' },
  ] },
  currentDensity: { si: 'A/m²', units: [
    { id: 'MA/cm2', label: 'MA/cm²', factor: 1e10, ucum: 'MA/cm2' },
    { id: 'A/m2', label: 'A/m²', factor: 1, ucum: 'A/m2' },
    { id: 'A/cm2', label: 'A/cm²', factor: 1e4, ucum: 'A/cm2' },
  ] },
  voltage: { si: 'V', units: [
    { id: 'V', label: 'V', factor: 1, ucum: 'V' },
    { id: 'mV', label: 'mV', factor: 1e-3, ucum: 'mV' },
  ] },
  exchange: { si: 'J/m', units: [
    { id: 'pJ/m', label: 'pJ/m', factor: 1e-12, ucum: 'pJ/m' },
    { id: 'J/m', label: 'J/m', factor: 1, ucum: 'J/m' },
    { id: 'µerg/cm', label: 'µerg/cm', factor: 1e-11, ucum: 'uerg/cm' },
  ] },
  interfaceEnergy: { si: 'J/m²', units: [
    { id: 'mJ/m2', label: 'mJ/m²', factor: 1e-3, ucum: 'mJ/m2' },
    { id: 'erg/cm2', label: 'erg/cm²', factor: 1e-3, ucum: 'erg/cm2' },
    { id: 'J/m2', label: 'J/m²', factor: 1, ucum: 'J/m2' },
  ] },
  resistanceArea: { si: 'Ω·m²', units: [
    { id: 'Ω·µm2', label: 'Ω·µm²', factor: 1e-12, ucum: 'Ohm.um2' },
    { id: 'Ω·m2', label: 'Ω·m²', factor: 1, ucum: 'Ohm.m2' },
  ] },
  fieldPerSquareVolt: { si: 'A/(m·V²)', units: [
    { id: 'mT/V2', label: 'mT/V²', factor: PER_TESLA * 1e-3, ucum: 'mT/V2' },
    { id: 'A/(m·V2)', label: 'A/(m·V²)', factor: 1, ucum: 'A/(m.V2)' },
  ] },
  voltageAnisotropy: { si: 'J/(V·m)', units: [
    { id: 'fJ/(V·m)', label: 'fJ/Vm', factor: 1e-15, ucum: 'fJ/(V.m)' },
    { id: 'J/(V·m)', label: 'J/(V·m)', factor: 1, ucum: 'J/(V.m)' },
  ] },
  perKelvin: { si: '1/K', units: [
    { id: '%/K', label: '%/K', factor: 0.01, ucum: '%/K' },
    { id: '1/K', label: '1/K', factor: 1, ucum: '/K' },
  ] },
  thermalResistance: { si: 'K/W', units: [
    { id: 'K/µW', label: 'K/µW', factor: 1e6, ucum: 'K/uW' },
    { id: 'K/W', label: 'K/W', factor: 1, ucum: 'K/W' },
  ] },
  resistance: { si: 'Ω', units: [
    { id: 'Ω', label: 'Ω', factor: 1, ucum: 'Ohm' },
    { id: 'kΩ', label: 'kΩ', factor: 1e3, ucum: 'kOhm' },
  ] },
  angle: { si: 'rad', units: [
    { id: '°', label: '°', factor: Math.PI / 180, ucum: 'deg' },
    { id: 'rad', label: 'rad', factor: 1, ucum: 'rad' },
  ] },
  cpu: { si: 's', units: [
    { id: 'h', label: 'h', factor: 3600, ucum: 'h' },
    { id: 'min', label: 'min', factor: 60, ucum: 'min' },
    { id: 's', label: 's', factor: 1, ucum: 's' },
  ] },
} as const satisfies Record<string, { si: string, units: readonly Unit[] }>

export type Dimension = keyof typeof DIMENSIONS

/** What a quantity field carries beside its limits: forms, axes, CSV headers and the API document read it. */
export interface QuantityMeta {
  label: string
  symbol?: string
  dimension: Dimension
  /** id of the unit offered first */
  unit: string
  hint?: string
}

/** A bounded finite SI number with its label, symbol and units as metadata. −0 reads as 0. */
export const quantity = (meta: QuantityMeta, min: number, max: number) =>
  z.number().min(min).max(max).meta({ ...meta, description: describe(meta, min, max) })

function describe(meta: QuantityMeta, min: number, max: number) {
  const si = DIMENSIONS[meta.dimension].si
  return `${meta.label}${meta.symbol ? ` (${meta.symbol})` : ''}, ${si || 'dimensionless'}, ${min} to ${max}.${meta.hint ? ` ${meta.hint}` : ''}`
}

/** Metadata of a quantity schema, looking through optional and default wrappers. Throws when there is none. */
export function quantityMeta(schema: z.ZodType): QuantityMeta & { min: number, max: number } {
  let inner = schema
  while (inner instanceof z.ZodDefault || inner instanceof z.ZodOptional) inner = inner.unwrap() as z.ZodType
  const meta = inner.meta()
  if (!(inner instanceof z.ZodNumber) || !meta || typeof meta.dimension !== 'string') throw new Error('not a quantity schema')
  return { ...(meta as unknown as QuantityMeta), min: inner.minValue ?? -Infinity, max: inner.maxValue ?? Infinity }
}
