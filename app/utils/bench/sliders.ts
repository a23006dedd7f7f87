import { formatPlain, toUnit, fromUnit } from '#shared/utils/quantity'
import { fieldAt, type QuantityField } from './fields'

/** Entries that are tried with a slider, and how far it goes: as a factor both ways, or between two values in SI. */
export const SLIDERS: readonly { path: string, range: { factor: number } | { from: number, to: number } }[] = [
  { path: 'write.drive.current', range: { factor: 4 } },
  { path: 'write.width', range: { factor: 5 } },
  { path: 'environment.temperature', range: { from: 253.15, to: 423.15 } },
  { path: 'device.damping', range: { factor: 5 } },
  { path: 'device.diameter', range: { factor: 2 } },
]

/** Steps of a slider from end to end. */
export const STEPS = 200

/** A slider around the value that it starts at: position to value in SI and back, within the entry's limits. */
export interface Slider { field: QuantityField, value: (position: number) => number, position: (value: number) => number, words: (value: number) => string }

/** @param start value in SI that the middle of a slider by factor stands for */
export function sliderOf({ path, range }: typeof SLIDERS[number], start: number): Slider {
  const field = fieldAt(path)
  if (field.kind !== 'quantity') throw new Error(`${path} is no quantity`)
  const even = 'from' in range
  const low = even ? range.from : Math.max(field.min, start / range.factor)
  const high = even ? range.to : Math.min(field.max, start * range.factor)
  const share = (value: number) => even ? (value - low) / (high - low) : Math.log(value / low) / Math.log(high / low)
  return {
    field,
    value: (position) => {
      const at = position / STEPS
      const plain = even ? low + at * (high - low) : low * (high / low) ** at
      return fromUnit(Number(toUnit(plain, field.dimension, field.unit).toPrecision(3)), field.dimension, field.unit)
    },
    position: value => Math.round(STEPS * Math.min(1, Math.max(0, share(value)))),
    words: value => formatPlain(value, field.dimension, field.unit),
  }
}
