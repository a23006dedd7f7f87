import { describe, expect, it } from 'vitest'
import { z } from 'zod'
import { DIMENSIONS, quantityMeta } from '#shared/schemas/quantities'
import type { Dimension } from '#shared/schemas/quantities'
import { deviceSchema, jobSpecSchema } from '#shared/schemas/job'
import { formatDuration, formatNumber, formatShare, formatUncertain, formatCount } from '#shared/utils/format'
import { formatPlain, formatQuantity, formatSi, fromUnit, parseQuantity, toUnit } from '#shared/utils/quantity'
import { sentence } from '#shared/utils/sentence'
import { packArrays, unpackArrays } from '#shared/utils/arrays'
import { WORKED_SET } from '../support/specs'

/** Narrow no-break spaces as plain ones, to compare by eye. */
const plain = (text: string) => text.replaceAll('\u202F', ' ')

describe('what people type', () => {
  it.each([
    ['1 050', 'magnetization', 'kA/m', 1.05e6],
    ['3.4e3', 'field', 'Oe', 270563.4034],
    ['3400 Oe', 'field', 'mT', 270563.4034],
    ['0.34 T', 'field', 'Oe', 270563.4032],
    ['1050 emu/cm³', 'magnetization', 'kA/m', 1.05e6],
    ['14 Å', 'length', 'nm', 1.4e-9],
    ['85', 'temperature', '°C', 358.15],
    ['358.15 K', 'temperature', '°C', 358.15],
    ['−5', 'field', 'mT', -3978.87],
    ['62 uA', 'current', 'mA', 62e-6],
    ['62 μA', 'current', 'mA', 62e-6],
    ['10 MA/cm^2', 'currentDensity', 'A/m2', 1e11],
    ['6 Ω·µm²', 'resistanceArea', 'Ω·m2', 6e-12],
    ['6 Ohm um2', 'resistanceArea', 'Ω·m2', 6e-12],
    ['140', 'ratio', '%', 1.4],
    ['300 ps', 'time', 'ns', 3e-10],
    ['2 × 10^3', 'time', 'ps', 2e-9],
    ['.5', 'number', '1', 0.5],
  ] as [string, Dimension, string, number][])('%s as %s', (text, dimension, unit, si) => {
    const parsed = parseQuantity(text, dimension, unit)
    expect(parsed.ok && Math.abs(parsed.value / si - 1)).toBeLessThan(1e-6)
  })

  it.each([
    ['', 'length'], ['abc', 'length'], ['1,5', 'length'], ['5 kg', 'length'], ['1e999', 'length'], ['--3', 'length'], ['5 nm', 'number'], ['NaN', 'field'], ['Infinity', 'field'],
  ] as [string, Dimension][])('%j is refused for a %s in words', (text, dimension) => {
    const parsed = parseQuantity(text, dimension)
    expect(parsed.ok).toBe(false)
    expect(!parsed.ok && parsed.error.length).toBeGreaterThan(5)
  })

  it('goes to every unit and back', () => {
    for (const [dimension, { units }] of Object.entries(DIMENSIONS)) {
      for (const unit of units) expect(Math.abs(toUnit(fromUnit(12.34, dimension as Dimension, unit.id), dimension as Dimension, unit.id) - 12.34)).toBeLessThan(1e-9)
    }
  })

  it('never yields −0', () => {
    expect(Object.is(parseQuantity('-0', 'field', 'mT').ok && (parseQuantity('-0', 'field', 'mT') as { value: number }).value, 0)).toBe(true)
  })
})

describe('numbers as shown', () => {
  it('keeps the figures that count', () => {
    expect(plain(formatNumber(31.12345))).toBe('31.12')
    expect(plain(formatNumber(0.00012345, 3))).toBe('1.23 × 10⁻⁴')
    expect(plain(formatNumber(178500))).toBe('178 500')
    expect(plain(formatNumber(0.99996, 4))).toBe('1.000')
    expect(plain(formatUncertain(2.31449, 0.0123))).toBe('2.314(12)')
    expect(plain(formatUncertain(12345.6, 250))).toBe('12346(250)')
    expect(plain(formatShare(0.00133))).toBe('1.33 × 10⁻³')
    expect(plain(formatShare(0.9997))).toBe('99.97 %')
    expect(plain(formatCount(10000))).toBe('10 000')
    expect(plain(formatDuration(47_460))).toBe('13 h 11 m')
    expect(plain(formatDuration(59.7))).toBe('1 m')
    expect(plain(formatPlain(0.3e-9, 'time', 'ns'))).toBe('0.3 ns')
    expect(plain(formatPlain(358.15, 'temperature', '°C'))).toBe('85 °C')
    expect(plain(formatQuantity(270563.4, 'field', 'mT'))).toBe('340.0 mT')
    expect(plain(formatSi(270563.4, 'field'))).toBe('270.6 kA/m')
  })
})

describe('the specification', () => {
  const parse = (input: object) => jobSpecSchema.safeParse({ ...WORKED_SET, ...input })

  it('carries its label and units with every number', () => {
    expect(quantityMeta(deviceSchema.shape.damping)).toMatchObject({ symbol: 'α', dimension: 'number', min: 1e-4, max: 2 })
    expect(quantityMeta(deviceSchema.shape.fieldLikeRatio).symbol).toBe('β')
    expect(() => quantityMeta(z.string())).toThrow()
    expect(JSON.stringify(z.toJSONSchema(jobSpecSchema, { io: 'input' }))).toContain('"unit":"kA/m"')
  })

  it.each([
    ['an unknown key', { ownerId: 'me' }],
    ['NaN', { device: { ...WORKED_SET.device, damping: NaN } }],
    ['Infinity', { device: { ...WORKED_SET.device, damping: Infinity } }],
    ['a number as text', { device: { ...WORKED_SET.device, damping: '0.01' } }],
    ['null', { device: { ...WORKED_SET.device, damping: null } }],
    ['a seed of 2^53', { numerics: { seed: 2 ** 53 } }],
    ['half a trial', { question: { kind: 'switching', trials: 10.5 } }],
    ['a denormal damping', { device: { ...WORKED_SET.device, damping: 5e-324 } }],
    ['an edge longer than the width', { write: { ...WORKED_SET.write, edge: 11e-9 } }],
  ])('refuses %s', (_name, input) => {
    expect(parse(input).success).toBe(false)
  })

  it('reads as a sentence', () => {
    const result = parse({ write: { ...WORKED_SET.write, edge: 0.3e-9 }, environment: { temperature: 358.15 } })
    expect(plain(sentence(result.data!))).toBe('How fast does cell P, 40 nm switch from parallel to antiparallel under 60 µA, 10 ns, 0.3 ns edges at 85 °C, over 1000 trials?')
  })
})

describe('packed arrays', () => {
  it('come back as they went', () => {
    const packed = packArrays({ a: 'µ' }, { times: new Float64Array([1, NaN, -0]), flags: new Uint8Array([1, 2, 3]), paths: new Float32Array([0.5]) })
    const { meta, arrays } = unpackArrays(packed)
    expect(meta).toEqual({ a: 'µ' })
    expect(arrays.times).toEqual(new Float64Array([1, NaN, -0]))
    expect(arrays.flags).toEqual(new Uint8Array([1, 2, 3]))
    expect(arrays.paths).toEqual(new Float32Array([0.5]))
    expect(() => unpackArrays(packed.subarray(0, packed.length - 8))).toThrow(RangeError)
  })
})
