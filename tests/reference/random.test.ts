import { describe, expect, it } from 'vitest'
import { exactExp, exactLog } from '#shared/numerics/elementary'
import { normalQuantile, normalTriple } from '#shared/numerics/normal'
import { philox, UniformStream } from '#shared/numerics/philox'

describe('Philox4x32-10 against the known answers of its authors (Salmon et al. 2011, from memory)', () => {
  it.each([
    ['zero', [0, 0, 0, 0, 0, 0], [0x6627E8D5, 0xE169C58D, 0xBC57AC4C, 0x9B00DBD8]],
    ['all ones', [-1, -1, -1, -1, -1, -1], [0x408F276D, 0x41C83B0E, 0xA20BC7C6, 0x6D5451FD]],
    ['digits of π', [0x243F6A88, 0x85A308D3, 0x13198A2E, 0x03707344, 0xA4093822, 0x299F31D0], [0xD16CFE09, 0x94FDCCEB, 0x5001E420, 0x24126EA1]],
  ] as const)('%s', (_, [c0, c1, c2, c3, k0, k1], expected) => {
    const out = new Uint32Array(4)
    philox(c0, c1, c2, c3, k0, k1, out)
    expect([...out]).toEqual([...expected])
  })
})

describe('elementary functions from basic operations', () => {
  it('agree with the engine’s own to a few last places', () => {
    let worst = 0
    for (let k = 0; k < 20000; k++) {
      const x = -690 + k * 0.069
      worst = Math.max(worst, Math.abs(exactExp(x) / Math.exp(x) - 1))
      const y = Math.exp(-40 + k * 0.004)
      if (Math.abs(Math.log(y)) > 1e-2) worst = Math.max(worst, Math.abs(exactLog(y) / Math.log(y) - 1))
    }
    expect(worst).toBeLessThan(2e-15)
  })
})

describe('normal numbers', () => {
  it('follow the quantiles of Abramowitz & Stegun, table 26.1 and 26.2', () => {
    expect(normalQuantile(0.975)).toBeCloseTo(1.959963984540054, 14)
    expect(normalQuantile(1e-10)).toBeCloseTo(-6.361340902404056, 12)
    expect(normalQuantile(0.5)).toBe(0)
  })

  it('have the moments and tails of a standard normal distribution (300 000 draws)', () => {
    const words = new Uint32Array(4)
    const out = new Float64Array(3)
    const n = 300_000
    const sums = [0, 0, 0, 0]
    let beyond3 = 0
    let cross = 0
    for (let k = 0; k < n / 3; k++) {
      philox(k, 0, 5, 0, 11, 22, words)
      normalTriple(words, out)
      cross += out[0]! * out[1]!
      for (const g of out) {
        for (let power = 1; power <= 4; power++) sums[power - 1]! += g ** power
        if (Math.abs(g) > 3) beyond3++
      }
    }
    const within = (value: number, expected: number, deviation: number) => expect(Math.abs(value - expected) / deviation).toBeLessThan(4)
    within(sums[0]! / n, 0, 1 / Math.sqrt(n))
    within(sums[1]! / n, 1, Math.sqrt(2 / n))
    within(sums[2]! / n, 0, Math.sqrt(15 / n))
    within(sums[3]! / n, 3, Math.sqrt(96 / n))
    within(beyond3 / n, 2.699796e-3, Math.sqrt(2.7e-3 / n))
    within(cross / (n / 3), 0, 1 / Math.sqrt(n / 3))
  })

  it('depend on trial and purpose, not on what was drawn before', () => {
    const stream = new UniformStream([1, 2], 1)
    stream.restart(7)
    const first = [stream.next(), stream.next(), stream.next()]
    stream.restart(8)
    const other = stream.next()
    stream.restart(7)
    expect([stream.next(), stream.next(), stream.next()]).toEqual(first)
    expect(other).not.toBe(first[0])
  })
})
