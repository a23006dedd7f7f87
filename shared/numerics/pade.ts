/** One simple pole of a rational function with its residue; the conjugate belongs to it. */
export interface Pole { re: number, im: number, residueRe: number, residueIm: number }

function partialFractions(p: number, q: number): Pole[] {
  const factorial = (n: number): number => n < 2 ? 1 : n * factorial(n - 1)
  const numerator = Array.from({ length: p + 1 }, (_, j) => factorial(p + q - j) * factorial(p) / (factorial(p + q) * factorial(j) * factorial(p - j)))
  const denominator = Array.from({ length: q + 1 }, (_, j) => (j % 2 === 0 ? 1 : -1) * factorial(p + q - j) * factorial(q) / (factorial(p + q) * factorial(j) * factorial(q - j)))
  const roots = polynomialRoots(denominator)
  const derivative = denominator.slice(1).map((c, j) => c * (j + 1))
  return roots.filter(root => root.im > 0).map((root) => {
    const above = evaluate(numerator, root)
    const below = evaluate(derivative, root)
    const norm = below.re ** 2 + below.im ** 2
    return { ...root, residueRe: (above.re * below.re + above.im * below.im) / norm, residueIm: (above.im * below.re - above.re * below.im) / norm }
  })
}

interface Complex { re: number, im: number }
const evaluate = (coefficients: readonly number[], z: Complex): Complex =>
  coefficients.reduceRight<Complex>((sum, c) => ({ re: sum.re * z.re - sum.im * z.im + c, im: sum.re * z.im + sum.im * z.re }), { re: 0, im: 0 })

/** All roots by simultaneous (Durand–Kerner) iteration. */
function polynomialRoots(coefficients: readonly number[]): Complex[] {
  const degree = coefficients.length - 1
  const monic = coefficients.map(c => c / coefficients[degree]!)
  const radius = 1.2 * Math.abs(monic[0]!) ** (1 / degree)
  const roots = Array.from({ length: degree }, (_, k) => ({ re: radius * Math.cos(2 * Math.PI * k / degree + 0.4), im: radius * Math.sin(2 * Math.PI * k / degree + 0.4) }))
  for (let iteration = 0; iteration < 200; iteration++) {
    for (const [k, root] of roots.entries()) {
      const value = evaluate(monic, root)
      let [dr, di] = [1, 0]
      for (const [j, other] of roots.entries()) {
        if (j === k) continue
        const [a, b] = [root.re - other.re, root.im - other.im];
        [dr, di] = [dr * a - di * b, dr * b + di * a]
      }
      const norm = dr * dr + di * di
      roots[k] = { re: root.re - (value.re * dr + value.im * di) / norm, im: root.im - (value.im * dr - value.re * di) / norm }
    }
  }
  return roots
}

/**
 * The (5, 6) Padé approximation of e^z as partial fractions: e^z ≈ Σ 2 Re[r/(z − p)]. It is L-stable, and its relative error at
 * moderate |z| is about 4.5e-12 |z|¹² (Hairer & Wanner, Solving Ordinary Differential Equations II, section IV.3).
 */
export const EXPONENTIAL_POLES: readonly Pole[] = partialFractions(5, 6)
