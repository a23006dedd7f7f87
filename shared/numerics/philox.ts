/**
 * Philox4x32-10, the counter-based generator of Salmon, Moraes, Dror & Shaw, "Parallel random numbers: as easy as
 * 1, 2, 3", SC11 (2011). A block of four 32-bit words is a pure function of a 128-bit counter and a 64-bit key, so
 * any trial's noise can be made anywhere, in any order.
 */
const M0 = 0xD2511F53
const M1 = 0xCD9E8D57
const W0 = 0x9E3779B9
const W1 = 0xBB67AE85
const M0_HIGH = M0 >>> 16
const M0_LOW = M0 & 0xFFFF
const M1_HIGH = M1 >>> 16
const M1_LOW = M1 & 0xFFFF

/** Fills `out` with the block of counter (c0, c1, c2, c3) under key (k0, k1); all are taken modulo 2³². */
export function philox(c0: number, c1: number, c2: number, c3: number, k0: number, k1: number, out: Uint32Array): void {
  let x0 = c0 | 0
  let x1 = c1 | 0
  let x2 = c2 | 0
  let x3 = c3 | 0
  let key0 = k0 | 0
  let key1 = k1 | 0
  for (let round = 0; round < 10; round++) {
    // The high half of a 32 × 32 product, from 16-bit halves in wrapped integer arithmetic.
    const a = x0 & 0xFFFF
    const A = x0 >>> 16
    const a1 = Math.imul(A, M0_LOW) + (Math.imul(a, M0_LOW) >>> 16) | 0
    const a2 = Math.imul(a, M0_HIGH) + (a1 & 0xFFFF) | 0
    const high0 = Math.imul(A, M0_HIGH) + (a1 >>> 16) + (a2 >>> 16) | 0
    const b = x2 & 0xFFFF
    const B = x2 >>> 16
    const b1 = Math.imul(B, M1_LOW) + (Math.imul(b, M1_LOW) >>> 16) | 0
    const b2 = Math.imul(b, M1_HIGH) + (b1 & 0xFFFF) | 0
    const high1 = Math.imul(B, M1_HIGH) + (b1 >>> 16) + (b2 >>> 16) | 0
    const low0 = Math.imul(x0, M0)
    const low1 = Math.imul(x2, M1)
    x0 = high1 ^ x1 ^ key0
    x1 = low1
    x2 = high0 ^ x3 ^ key1
    x3 = low0
    key0 = (key0 + W0) | 0
    key1 = (key1 + W1) | 0
  }
  out[0] = x0
  out[1] = x1
  out[2] = x2
  out[3] = x3
}

/** What a trial draws numbers for; each has its own counters, so that one never shifts another. */
export const STREAM = { noise: 0, start: 1, crossing: 2 } as const

/** A trial's uniforms for one purpose, drawn one after the other. */
export class UniformStream {
  private readonly words = new Uint32Array(4)
  private block = 0
  private used = 4
  private trial = 0
  constructor(private readonly key: readonly [number, number], private readonly purpose: number) {}

  /** Starts over at the first number of a trial. */
  restart(trial: number): void {
    this.trial = trial
    this.block = 0
    this.used = 4
  }

  /** Uniform in (0, 1), 52 bits, never 0 or 1. */
  next(): number {
    if (this.used >= 4) {
      philox(this.block++, this.purpose, this.trial, 0, this.key[0], this.key[1], this.words)
      this.used = 0
    }
    const high = this.words[this.used]! >>> 6
    const low = this.words[this.used + 1]! >>> 6
    this.used += 2
    return (high * 2 ** 26 + low + 0.5) / 2 ** 52
  }
}
