import { describe, expect, it } from 'vitest'
import { axialWriteErrors } from '#shared/numerics/axial'
import { axialLowestRate } from '#shared/numerics/escape'
import type { SphericalDevice } from '#shared/numerics/spherical'
import { sphericalLowestRate, sphericalWriteErrors } from '#shared/numerics/spherical'

const off = (value: number, from: number) => Math.abs(value / from - 1)
const axial = (damping: number, stability: number): SphericalDevice =>
  ({ damping, stability, curvature: [0, 0, 1], field: [0, 0, 0], polarizer: [0, 0, -1] })
const turned = (device: SphericalDevice, degrees: number): SphericalDevice =>
  ({ ...device, polarizer: [-Math.sin(degrees * Math.PI / 180), 0, -Math.cos(degrees * Math.PI / 180)] })

// In-plane biaxial, E/kT = −s_x m_x² + s_d m_z², λ₁τ_D (Brown 1963 in two dimensions; two unrelated methods). The easy axis x is called z here,
// the hard axis x; the threshold of the drive is α(1 + s_d/2s_x) in units of H_k.
describe('the lowest rate of an in-plane bit', () => {
  it.each([
    [5, 10, 1, 0, 3.7453921255e-2],
    [5, 10, 0.1, 0, 1.9484265034e-1],
    [6, 30, 0.2, 0.3, 2.565403539e-1],
  ])('s_x = %d, s_d = %d, α = %d, I/I_c = %d', (easy, hard, damping, share, expected) => {
    const device: SphericalDevice = { damping, stability: easy, curvature: [-hard / easy, 0, 1], field: [0, 0, 0], polarizer: [0, 0, -1] }
    const rate = sphericalLowestRate(device, share * (1 + hard / easy / 2), { degree: 44, order: 44, step: 1 })
    expect(off(rate! * easy, expected)).toBeLessThan(1e-6)
  })
})

describe('the general solution where the axial one holds', () => {
  it('has the axial rate', () => {
    expect(off(sphericalLowestRate(axial(0.1, 10), 0, { degree: 40, order: 0, step: 1 })!, axialLowestRate({ stability: 10, field: 0 }))).toBeLessThan(1e-9)
  })

  it.each(['atPulseEnd', 'afterSettling'] as const)('has the axial write errors, %s, with and without edges, whatever the damping', (rule) => {
    const widths = [1, 3, 6]
    for (const [damping, edge] of [[0.1, 0], [0.02, 0.3]] as const) {
      const general = sphericalWriteErrors(axial(damping, 30), { drive: 2, edge }, widths, rule, { degree: 64, order: 0, step: 1 })
      const exact = axialWriteErrors({ stability: 30, field: 0 }, { drive: 2, edge }, widths, rule)
      general.forEach((value, k) => expect(off(value, exact[k]!)).toBeLessThan(1e-5))
    }
  })

  it('has a field along the axis, and none of its own where the reference layer turns with everything', () => {
    const general = sphericalWriteErrors({ ...axial(0.1, 30), field: [0, 0, 0.2] }, { drive: 2 }, [4], 'atPulseEnd', { degree: 64, order: 0, step: 2 })
    expect(off(general[0]!, axialWriteErrors({ stability: 30, field: 0.2 }, { drive: 2 }, [4], 'atPulseEnd')[0]!)).toBeLessThan(1e-5)
  })

  it('approaches it as the tilt goes to zero, in its square', () => {
    const resolution = { degree: 48, order: 3, step: 2 }
    const error = (degrees: number) => sphericalWriteErrors(turned(axial(0.1, 25), degrees), { drive: 2 }, [4], 'atPulseEnd', resolution)[0]!
    const [none, small, large] = [error(0), error(2), error(4)] as const
    expect(off((large / none - 1) / (small / none - 1), 4)).toBeLessThan(0.05)
  })
})

describe('the general solution', () => {
  it('has one solution whatever the turn of tilt and field about the axis', () => {
    const resolution = { degree: 40, order: 4, step: 2 }
    const along = { ...axial(0.1, 20), field: [0.03, 0, 0], polarizer: [-0.05, 0, -Math.sqrt(1 - 0.05 ** 2)] } satisfies SphericalDevice
    const across = { ...along, field: [0, 0.03, 0], polarizer: [0, -0.05, -Math.sqrt(1 - 0.05 ** 2)] } satisfies SphericalDevice
    const [a, b] = [along, across].map(device => sphericalWriteErrors(device, { drive: 2 }, [3], 'atPulseEnd', resolution)[0]!)
    expect(off(a!, b!)).toBeLessThan(1e-10)
  })

  it('stays with Boltzmann for ever without a drive, but for the slow escape', () => {
    const device: SphericalDevice = { ...axial(0.2, 12), curvature: [0.2, 0, 1] }
    const resolution = { degree: 40, order: 8, step: 2 }
    const errors = sphericalWriteErrors(device, { drive: 0 }, [5, 55], 'afterSettling', resolution)
    const rate = sphericalLowestRate(device, 0, resolution)!
    // From one well of two alike: ½(1 + e^−λτ), once motion within the well no longer matters.
    expect(off((2 * errors[1]! - 1) / (2 * errors[0]! - 1), Math.exp(-50 * rate))).toBeLessThan(1e-6)
  })

  it('changes by less than a thousandth with more functions, for a tilt of 5° down to 1e-10', () => {
    const device = turned(axial(0.02, 40), 5)
    const [coarse, fine] = ([[48, 4, 3], [60, 6, 3]] as const).map(([degree, order, step]) =>
      sphericalWriteErrors(device, { drive: 2 }, [5, 13], 'afterSettling', { degree, order, step }))
    expect(fine![1]!).toBeLessThan(2e-10)
    fine!.forEach((value, k) => expect(off(coarse![k]!, value)).toBeLessThan(1e-3))
  })
})
