import { describe, expect, it } from 'vitest'
import { axialWriteErrors, defaultModes } from '#shared/numerics/axial'

const relative = (value: number, expected: number) => Math.abs(value / expected - 1)

/**
 * Write errors under a collinear drive in reduced units: independent spectral, finite-volume and multi-precision solutions that
 * agree with one another (reference list). Δ, i, τ, h; W_end, W_rel, S.
 */
const TABLE = [
  [20, 2, 3, 0, 3.63159782e-2, 3.65879369e-2, 3.58461798e-2],
  [40, 2, 5, 0, 1.32848954e-3, 1.33316950e-3, 1.31998479e-3],
  [40, 3, 4, 0, 6.89917505e-6, 6.96093974e-6, 6.86041503e-6],
  [60, 1.5, 10, 0, 6.46642555e-4, 6.46726605e-4, 6.44122421e-4],
  [60, 2, 4, 0, 1.52694845e-2, 1.53028916e-2, 1.52052273e-2],
  [60, 3, 8, 0, 1.16675640e-12, 1.17354974e-12, 1.16240279e-12],
  [40, 2, 5, 0.2, 7.96350697e-3, 9.57195774e-3, 7.91278122e-3],
  [40, 1, 10, 0, 2.89333808e-1, 2.89010133e-1, 2.88497136e-1],
] as const

describe('axial Fokker–Planck, backwards', () => {
  it.each(TABLE)('Δ = %d, i = %d, τ = %d, h = %d', (stability, drive, width, field, end, settled, never) => {
    const errors = (rule: 'atPulseEnd' | 'afterSettling' | 'neverCrossed', modes?: number) => axialWriteErrors({ stability, field }, { drive }, [width], rule, modes)[0]!
    expect(relative(errors('atPulseEnd'), end)).toBeLessThan(1e-7)
    expect(relative(errors('afterSettling'), settled)).toBeLessThan(1e-7)
    expect(relative(errors('neverCrossed'), never)).toBeLessThan(1e-7)
  })

  it('keeps the tail where a forward density loses it: Δ = 40, i = 2, τ = 16: 2.87e-13', () => {
    expect(relative(axialWriteErrors({ stability: 40, field: 0 }, { drive: 2 }, [16], 'atPulseEnd')[0]!, 2.87e-13)).toBeLessThan(2e-3)
  })

  it('has converged in the basis', () => {
    const device = { stability: 60, field: 0 }
    const few = axialWriteErrors(device, { drive: 3 }, [2, 8], 'afterSettling')
    const many = axialWriteErrors(device, { drive: 3 }, [2, 8], 'afterSettling', 2 * defaultModes(device, 3))
    few.forEach((value, k) => expect(relative(value, many[k]!)).toBeLessThan(1e-6))
  })

  it('gives the same number whether a width is asked for alone or on the way', () => {
    const device = { stability: 40, field: 0 }
    const widths = Array.from({ length: 200 }, (_, k) => (k + 1) * 0.06)
    const all = axialWriteErrors(device, { drive: 2 }, widths, 'atPulseEnd')
    for (const k of [0, 10, 83, 199]) expect(relative(all[k]!, axialWriteErrors(device, { drive: 2 }, [widths[k]!], 'atPulseEnd')[0]!)).toBeLessThan(1e-8)
  })

  it('falls at the tail rate 2(i − 1) + (3 − i)/(Δ(i − 1)) → 2.023288869577687 at Δ = 40, i = 2', () => {
    const [a, b] = axialWriteErrors({ stability: 40, field: 0 }, { drive: 2 }, [12, 14], 'atPulseEnd')
    expect(relative(Math.log(a! / b!) / 2, 2.023288869577687)).toBeLessThan(1e-6)
  })

  it('treats the symmetric junction’s i(z) and the field-like torque as what they are', () => {
    const base = axialWriteErrors({ stability: 40, field: 0 }, { drive: 2 }, [4], 'atPulseEnd')[0]!
    // q2 = 0 is the constant torque; field-like torque scales the pull.
    expect(relative(axialWriteErrors({ stability: 40, field: 0, torque: { q1: 3, q2: 0 } }, { drive: 2 }, [4], 'atPulseEnd')[0]!, base)).toBeLessThan(1e-9)
    expect(relative(axialWriteErrors({ stability: 40, field: 0, fieldLike: 0.1 }, { drive: 2 / 1.1 }, [4], 'atPulseEnd')[0]!, base)).toBeLessThan(1e-9)
    // A torque that grows on the way switches sooner than one that stays.
    expect(axialWriteErrors({ stability: 40, field: 0, torque: { q1: 1, q2: 0.36 } }, { drive: 2 }, [4], 'atPulseEnd')[0]!).toBeLessThan(base)
  })

  it('carries the edges: a trapezoid is the limit of its staircase, and a vanishing edge is none', () => {
    const device = { stability: 40, field: 0 }
    const sharp = axialWriteErrors(device, { drive: 2 }, [5], 'atPulseEnd')[0]!
    expect(relative(axialWriteErrors(device, { drive: 2, edge: 1e-6 }, [5], 'atPulseEnd')[0]!, sharp)).toBeLessThan(1e-4)
    for (const rule of ['atPulseEnd', 'afterSettling', 'neverCrossed'] as const) {
      const few = axialWriteErrors(device, { drive: 2, edge: 0.8 }, [2, 5, 9], rule)
      const many = axialWriteErrors(device, { drive: 2, edge: 0.8 }, [2, 5, 9], rule, 2 * defaultModes(device, 2))
      few.forEach((value, k) => expect(relative(value, many[k]!)).toBeLessThan(1e-6))
    }
  })
})
