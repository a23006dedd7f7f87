import { describe, expect, it } from 'vitest'
import { DEFAULT_SPEC } from '~/utils/bench/draft'
import { SLIDERS, STEPS, sliderOf } from '~/utils/bench/sliders'

const valueAt = (path: string) => path.split('.').reduce<unknown>((at, key) => (at as Record<string, unknown>)[key], DEFAULT_SPEC) as number

describe.each(SLIDERS)('the slider of $path', (entry) => {
  const start = valueAt(entry.path)
  const slider = sliderOf(entry, start)

  it('stands where its value is, and gives at each position a value within the limits, rising', () => {
    const values = Array.from({ length: STEPS + 1 }, (_, position) => slider.value(position))
    const at = slider.position(start)
    expect(Math.abs(slider.value(at) - start)).toBeLessThan(values[at + 1]! - values[at]!)
    expect([...values].sort((a, b) => a - b)).toEqual(values)
    expect(values[0]).toBeGreaterThanOrEqual(slider.field.min)
    expect(values.at(-1)).toBeLessThanOrEqual(slider.field.max)
    for (const position of [0, 50, STEPS]) expect(Math.abs(slider.position(slider.value(position)) - position)).toBeLessThanOrEqual(2)
  })

  it('keeps beyond its ends to them', () => {
    expect(slider.position(start * 1e6)).toBe(STEPS)
    expect(slider.position(start / 1e6)).toBe(0)
  })
})
