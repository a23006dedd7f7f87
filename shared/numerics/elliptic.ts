/**
 * Complete elliptic integrals K and E of modulus k (0 ≤ k < 1) by the arithmetic–geometric mean
 * (Abramowitz & Stegun, section 17.6). Relative error about 1e-15.
 */
export function completeElliptic(k: number): { K: number, E: number } {
  let a = 1
  let b = Math.sqrt((1 - k) * (1 + k))
  let c = k
  let sum = c * c / 2
  for (let power = 1; Math.abs(c) > 1e-17 && power < 1e6; power *= 2) {
    const next = (a + b) / 2
    c = (a - b) / 2
    b = Math.sqrt(a * b)
    a = next
    sum += power * c * c
  }
  const K = Math.PI / (2 * a)
  return { K, E: K * (1 - sum) }
}
