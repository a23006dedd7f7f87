/** Stirling's correction ln Γ(x) − [(x − ½) ln x − x + ½ ln 2π], x ≥ 15 (DLMF 5.11.1). */
function stirlingCorrection(x: number): number {
  const r = 1 / (x * x)
  return (1 / 12 + r * (-1 / 360 + r * (1 / 1260 + r * (-1 / 1680 + r * (1 / 1188 + r * (-691 / 360360 + r / 156)))))) / x
}

/** Natural logarithm of Γ(x), x > 0: Stirling's series after a shift to x ≥ 15. Relative error about 1e-15. */
export function logGamma(x: number): number {
  let shift = 0
  while (x < 15) {
    shift += Math.log(x)
    x += 1
  }
  return (x - 0.5) * Math.log(x) - x + 0.5 * Math.log(2 * Math.PI) + stirlingCorrection(x) - shift
}

/** ln B(a, b). For a large argument the two near-equal ln Γ are never formed: their difference is expanded instead. */
export function logBeta(a: number, b: number): number {
  const [small, large] = a < b ? [a, b] : [b, a]
  if (large < 15) return logGamma(a) + logGamma(b) - logGamma(a + b)
  const sum = small + large
  return logGamma(small) - (large - 0.5) * Math.log1p(small / large) - small * Math.log(sum) + small + stirlingCorrection(large) - stirlingCorrection(sum)
}

/** Regularised incomplete beta function I_x(a, b), a, b > 0: continued fraction by the modified Lentz method (DLMF 8.17.22). */
export function regularizedBeta(x: number, a: number, b: number): number {
  if (x <= 0) return 0
  if (x >= 1) return 1
  if (x > (a + 1) / (a + b + 2)) return 1 - regularizedBeta(1 - x, b, a)
  const front = Math.exp(a * Math.log(x) + b * Math.log1p(-x) - logBeta(a, b)) / a
  const tiny = 1e-300
  let c = 1
  let d = 1 - (a + b) * x / (a + 1)
  d = 1 / (Math.abs(d) < tiny ? tiny : d)
  let value = d
  for (let n = 1; n < 100000; n++) {
    const even = n * (b - n) * x / ((a + 2 * n - 1) * (a + 2 * n))
    d = 1 + even * d
    d = 1 / (Math.abs(d) < tiny ? tiny : d)
    c = 1 + even / c
    if (Math.abs(c) < tiny) c = tiny
    value *= d * c
    const odd = -(a + n) * (a + b + n) * x / ((a + 2 * n) * (a + 2 * n + 1))
    d = 1 + odd * d
    d = 1 / (Math.abs(d) < tiny ? tiny : d)
    c = 1 + odd / c
    if (Math.abs(c) < tiny) c = tiny
    const factor = d * c
    value *= factor
    if (Math.abs(factor - 1) < 1e-16) break
  }
  return front * value
}

/** x with I_x(a, b) = p, by bisection on a scale that keeps relative accuracy near 0. */
export function betaQuantile(p: number, a: number, b: number): number {
  if (p <= 0) return 0
  if (p >= 1) return 1
  let low = -745
  let high = 0
  for (let n = 0; n < 200 && high - low > 1e-15 * Math.abs(low); n++) {
    const middle = (low + high) / 2
    if (regularizedBeta(Math.exp(middle), a, b) < p) low = middle
    else high = middle
  }
  const fromLog = Math.exp((low + high) / 2)
  if (fromLog < 0.5) return fromLog
  return 1 - betaQuantileComplement(p, a, b)
}

function betaQuantileComplement(p: number, a: number, b: number): number {
  let low = -745
  let high = 0
  for (let n = 0; n < 200 && high - low > 1e-15 * Math.abs(low); n++) {
    const middle = (low + high) / 2
    // 1 − I_{1−y}(a, b) = I_y(b, a)
    if (regularizedBeta(Math.exp(middle), b, a) < 1 - p) low = middle
    else high = middle
  }
  return Math.exp((low + high) / 2)
}

export interface Interval { low: number, high: number }

/** Exact two-sided binomial interval, 95 % unless told: Clopper & Pearson, Biometrika 26, 404 (1934). One-sided at 0 and n it keeps 2.5 %. */
export function clopperPearson(count: number, of: number, level = 0.95): Interval {
  const tail = (1 - level) / 2
  return {
    low: count === 0 ? 0 : betaQuantile(tail, count, of - count + 1),
    high: count === of ? 1 : betaQuantile(1 - tail, count + 1, of - count),
  }
}

/** 0.975 quantile of the standard normal distribution. */
export const Z95 = 1.959963984540054

/** Score interval, 95 %: Wilson, J. Am. Stat. Assoc. 22, 209 (1927). */
export function wilson(count: number, of: number, z = Z95): Interval {
  const p = count / of
  const square = z * z / of
  const centre = (p + square / 2) / (1 + square)
  const half = z / (1 + square) * Math.sqrt(p * (1 - p) / of + square / (4 * of))
  return { low: count === 0 ? 0 : Math.max(0, centre - half), high: count === of ? 1 : Math.min(1, centre + half) }
}

/** Count of `of` with its share and exact 95 % interval. */
export function proportion(count: number, of: number): { count: number, of: number, value: number } & Interval {
  return { count, of, value: count / of, ...clopperPearson(count, of) }
}

/** Mean and standard deviation with standard errors and normal 95 % intervals; two passes in the order given. Null below two values. */
export function meanAndSpread(values: Float64Array): { mean: { value: number, standardError: number } & Interval, spread: { value: number, standardError: number } & Interval } | null {
  const n = values.length
  if (n < 2) return null
  let sum = 0
  for (let k = 0; k < n; k++) sum += values[k]!
  const mean = sum / n
  let second = 0
  let fourth = 0
  for (let k = 0; k < n; k++) {
    const square = (values[k]! - mean) ** 2
    second += square
    fourth += square * square
  }
  const variance = second / (n - 1)
  const deviation = Math.sqrt(variance)
  const estimate = (value: number, standardError: number) => ({ value, standardError, low: value - Z95 * standardError, high: value + Z95 * standardError })
  const ofVariance = Math.max(0, fourth / n - variance * variance) / n
  return { mean: estimate(mean, deviation / Math.sqrt(n)), spread: estimate(deviation, deviation > 0 ? Math.sqrt(ofVariance) / (2 * deviation) : 0) }
}

/**
 * Quantile of an unknown distribution from its order statistics with a distribution-free 95 % interval
 * (David & Nagaraja, Order Statistics, section 7.1). `sorted` holds the observed values in ascending order; the other
 * `of − sorted.length` are known only to lie beyond all of them. Null where the sample can't tell.
 */
export function orderQuantile(sorted: Float64Array, of: number, share: number): { value: number | null, low: number | null, high: number | null } {
  const at = (rank: number) => rank >= 1 && rank <= sorted.length ? sorted[rank - 1]! : null
  // P(X_(r) ≤ quantile) = P(Bin(n, p) ≥ r) = I_p(r, n − r + 1)
  const reached = (rank: number) => regularizedBeta(share, rank, of - rank + 1)
  const largest = (probability: number) => {
    let low = 0
    let high = of + 1
    while (high - low > 1) {
      const middle = (low + high) >> 1
      if (reached(middle) >= probability) low = middle
      else high = middle
    }
    return low
  }
  const lowRank = largest(0.975)
  const highRank = largest(0.025) + 1
  const value = at(Math.max(1, Math.ceil(share * of)))
  return { value, low: value === null ? null : at(lowRank), high: value === null ? null : at(highRank) }
}
