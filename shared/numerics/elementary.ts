/**
 * exp and log from basic IEEE operations only. `Math.exp` and `Math.log` may differ in the last place between
 * engines and machines, and a result must be the same bytes everywhere. Relative error below 2e-15.
 */
const LN2 = Math.LN2
/** ln 2 split in two, so that a multiple of the first part is exact. */
const LN2_HIGH = 0.6931471803691238
const LN2_LOW = 1.9082149292705877e-10
const bits = new DataView(new ArrayBuffer(8))

/** 2^k for integer k in −1022…1023. */
function powerOfTwo(k: number): number {
  bits.setUint32(0, (k + 1023) << 20)
  bits.setUint32(4, 0)
  return bits.getFloat64(0)
}

/** e^x; 0 below −700, Infinity above 709. */
export function exactExp(x: number): number {
  if (x < -700) return 0
  if (x > 709) return Infinity
  const k = Math.round(x / LN2)
  const r = (x - k * LN2_HIGH) - k * LN2_LOW
  let sum = 1
  for (let n = 14; n >= 1; n--) sum = 1 + sum * r / n
  return sum * powerOfTwo(k)
}

/** Natural logarithm of a positive number; −Infinity at 0, NaN below. */
export function exactLog(x: number): number {
  if (x === 0) return -Infinity
  if (!(x > 0) || x === Infinity) return x > 0 ? x : NaN
  bits.setFloat64(0, x)
  const high = bits.getUint32(0)
  let exponent = ((high >>> 20) & 0x7FF) - 1023
  if (exponent === -1023) return exactLog(x * 2 ** 54) - 54 * LN2
  bits.setUint32(0, (high & 0x000FFFFF) | 0x3FF00000)
  let mantissa = bits.getFloat64(0)
  if (mantissa > Math.SQRT2) {
    mantissa /= 2
    exponent += 1
  }
  const s = (mantissa - 1) / (mantissa + 1)
  const s2 = s * s
  let sum = 0
  for (let n = 23; n >= 1; n -= 2) sum = sum * s2 + 1 / n
  return 2 * s * sum + exponent * LN2_LOW + exponent * LN2_HIGH
}
