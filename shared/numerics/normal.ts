import { exactLog } from './elementary'

/**
 * Quantile of the standard normal distribution, relative error about 1e-16: Wichura, "Algorithm AS 241: the percentage
 * points of the normal distribution", Applied Statistics 37, 477 (1988), routine PPND16.
 */
export function normalQuantile(p: number): number {
  const q = p - 0.5
  if (q <= 0.425 && q >= -0.425) {
    const r = 0.180625 - q * q
    return q * (((((((2.5090809287301226727e3 * r + 3.3430575583588128105e4) * r + 6.7265770927008700853e4) * r + 4.5921953931549871457e4) * r + 1.3731693765509461125e4) * r + 1.9715909503065514427e3) * r + 1.3314166789178437745e2) * r + 3.3871328727963666080)
      / (((((((5.2264952788528545610e3 * r + 2.8729085735721942674e4) * r + 3.9307895800092710610e4) * r + 2.1213794301586595867e4) * r + 5.3941960214247511077e3) * r + 6.8718700749205790830e2) * r + 4.2313330701600911252e1) * r + 1)
  }
  let r = Math.sqrt(-exactLog(q < 0 ? p : 1 - p))
  let value: number
  if (r <= 5) {
    r -= 1.6
    value = (((((((7.74545014278341407640e-4 * r + 2.27238449892691845833e-2) * r + 2.41780725177450611770e-1) * r + 1.27045825245236838258) * r + 3.64784832476320460504) * r + 5.76949722146069140550) * r + 4.63033784615654529590) * r + 1.42343711074968357734)
      / (((((((1.05075007164441684324e-9 * r + 5.47593808499534494600e-4) * r + 1.51986665636164571966e-2) * r + 1.48103976427480074590e-1) * r + 6.89767334985100004550e-1) * r + 1.67638483018380384940) * r + 2.05319162663775882187) * r + 1)
  }
  else {
    r -= 5
    value = (((((((2.01033439929228813265e-7 * r + 2.71155556874348757815e-5) * r + 1.24266094738807843860e-3) * r + 2.65321895265761230930e-2) * r + 2.96560571828504891230e-1) * r + 1.78482653991729133580) * r + 5.46378491116411436990) * r + 6.65790464350110377720)
      / (((((((2.04426310338993978564e-15 * r + 1.42151175831644588870e-7) * r + 1.84631831751005468180e-5) * r + 7.86869131145613259100e-4) * r + 1.48753612908506148525e-2) * r + 1.36929880922735805310e-1) * r + 5.99832206555887937690e-1) * r + 1)
  }
  return q < 0 ? -value : value
}

const SCALE = 2 ** -42

/**
 * Three standard normal numbers from one block of four 32-bit words: 42 bits each, so that the tails reach 7.2σ.
 * The fourth word supplies the ten low bits of each.
 */
export function normalTriple(words: Uint32Array, out: Float64Array): void {
  const spare = words[3]!
  out[0] = normalQuantile((words[0]! * 1024 + (spare & 1023) + 0.5) * SCALE)
  out[1] = normalQuantile((words[1]! * 1024 + ((spare >>> 10) & 1023) + 0.5) * SCALE)
  out[2] = normalQuantile((words[2]! * 1024 + ((spare >>> 20) & 1023) + 0.5) * SCALE)
}
