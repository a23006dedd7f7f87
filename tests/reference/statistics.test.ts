import { describe, expect, it } from 'vitest'
import { clopperPearson, orderQuantile, wilson } from '#shared/numerics/statistics'

const relative = (value: number, expected: number) => Math.abs(value / expected - 1)

describe('binomial intervals, 95 %', () => {
  it('Wilson 1927: 1 of 1e5', () => {
    expect(relative(wilson(1, 1e5).low, 1.7652477304e-6)).toBeLessThan(1e-9)
    expect(relative(wilson(1, 1e5).high, 5.664709659e-5)).toBeLessThan(1e-9)
  })

  it('Clopper & Pearson 1934: 1 of 1e5, 0 of 1000', () => {
    expect(relative(clopperPearson(1, 1e5).low, 2.5317804779e-7)).toBeLessThan(1e-9)
    expect(relative(clopperPearson(1, 1e5).high, 5.5715160348e-5)).toBeLessThan(1e-9)
    expect(clopperPearson(0, 1000).low).toBe(0)
    expect(relative(clopperPearson(0, 1000).high, 3.6820838969e-3)).toBeLessThan(1e-9)
  })

  it('is symmetric between events and non-events', () => {
    const few = clopperPearson(7, 1000)
    const many = clopperPearson(993, 1000)
    expect(many.low).toBeCloseTo(1 - few.high, 12)
    expect(many.high).toBeCloseTo(1 - few.low, 12)
  })
})

describe('quantiles from order statistics', () => {
  it('covers the true median in at least 95 % of samples and says nothing where the sample ends', () => {
    const sorted = Float64Array.from({ length: 900 }, (_, k) => k + 1)
    // Normal approximation of the binomial ranks: 500 ± 1.96 √250.
    expect(orderQuantile(sorted, 1000, 0.5)).toEqual({ value: 500, low: 469, high: 532 })
    expect(orderQuantile(sorted, 1000, 0.95)).toEqual({ value: null, low: null, high: null })
    expect(orderQuantile(sorted, 1000, 0.9).high).toBeNull()
  })
})
