/**
 * Real spherical harmonics up to a degree L and an order M as a basis on the sphere, and what multiplies and turns functions in it.
 * Functions are numbered by degree, within it from order −min(l, M) (sines) over 0 to min(l, M) (cosines); all are orthonormal
 * (Varshalovich, Moskalev & Khersonskii, Quantum Theory of Angular Momentum, sections 5.6 and 5.8).
 */
export class HarmonicBasis {
  readonly size: number
  private readonly starts: Int32Array

  /** @param stride 2 leaves out odd orders, where half a turn about z changes nothing */
  constructor(readonly degree: number, readonly order: number, readonly stride: 1 | 2 = 1) {
    this.starts = new Int32Array(degree + 2)
    for (let l = 0; l <= degree; l++) this.starts[l + 1] = this.starts[l]! + 2 * this.highest(l) / stride + 1
    this.size = this.starts[degree + 1]!
  }

  /** Highest order at a degree. */
  private highest(l: number): number {
    const most = Math.min(l, this.order)
    return most - most % this.stride
  }

  has(l: number, m: number): boolean {
    return l >= 0 && l <= this.degree && Math.abs(m) <= Math.min(l, this.order) && m % this.stride === 0
  }

  index(l: number, m: number): number {
    return this.starts[l]! + (m + this.highest(l)) / this.stride
  }

  /** Calls `visit` for every function in turn. */
  each(visit: (l: number, m: number, index: number) => void): void {
    let index = 0
    for (let l = 0; l <= this.degree; l++) {
      for (let m = -this.highest(l); m <= this.highest(l); m += this.stride) visit(l, m, index++)
    }
  }

  /** Largest distance of two functions whose degrees and orders differ by at most `reach` each. */
  band(reach: number): number {
    let widest = 0
    this.each((l, m, index) => {
      for (let dl = 0; dl <= reach; dl++) {
        for (let m2 = m - reach; m2 <= m + reach; m2++) if (this.has(l + dl, m2)) widest = Math.max(widest, this.index(l + dl, m2) - index)
        for (let m2 = -m - reach; m2 <= -m + reach; m2++) if (this.has(l + dl, m2)) widest = Math.max(widest, this.index(l + dl, m2) - index)
      }
    })
    return widest
  }
}

/** Rows of a sparse matrix: for each the columns with their values. */
export type Sparse = Map<number, number>[]

type Term = [l: number, m: number, re: number, im: number]
/** What an operator makes of the complex harmonic Y_l^m (with the Condon–Shortley phase). */
type Action = (l: number, m: number) => Term[]

const raise: Action = (l, m) => [
  [l + 1, m + 1, -Math.sqrt((l + m + 1) * (l + m + 2) / ((2 * l + 1) * (2 * l + 3))), 0],
  [l - 1, m + 1, Math.sqrt(Math.max(0, (l - m) * (l - m - 1)) / ((2 * l - 1) * (2 * l + 1))), 0],
]
const lower: Action = (l, m) => [
  [l + 1, m - 1, Math.sqrt((l - m + 1) * (l - m + 2) / ((2 * l + 1) * (2 * l + 3))), 0],
  [l - 1, m - 1, -Math.sqrt(Math.max(0, (l + m) * (l + m - 1)) / ((2 * l - 1) * (2 * l + 1))), 0],
]
const turnUp: Action = (l, m) => [[l, m + 1, Math.sqrt(Math.max(0, l * (l + 1) - m * (m + 1))), 0]]
const turnDown: Action = (l, m) => [[l, m - 1, Math.sqrt(Math.max(0, l * (l + 1) - m * (m - 1))), 0]]

/** factor·(up + sign·down), the factor complex. */
const combined = (up: Action, down: Action, sign: number, re: number, im: number): Action => (l, m) =>
  [...up(l, m), ...down(l, m).map(([a, b, r, i]): Term => [a, b, sign * r, sign * i])].map(([a, b, r, i]) => [a, b, r * re - i * im, r * im + i * re])

/** Multiplication by x, y, z; and the three components of m × ∇. */
export const ACTIONS = {
  x: combined(raise, lower, 1, 0.5, 0),
  y: combined(raise, lower, -1, 0, -0.5),
  z: ((l, m) => [
    [l + 1, m, Math.sqrt(((l + 1) ** 2 - m * m) / ((2 * l + 1) * (2 * l + 3))), 0],
    [l - 1, m, Math.sqrt(Math.max(0, l * l - m * m) / ((2 * l - 1) * (2 * l + 1))), 0],
  ]) satisfies Action as Action,
  turnX: combined(turnUp, turnDown, 1, 0, 0.5),
  turnY: combined(turnUp, turnDown, -1, 0.5, 0),
  turnZ: ((l, m) => [[l, m, 0, m]]) satisfies Action as Action,
} as const

/** Real harmonic as a sum of complex ones. */
function complexParts(l: number, m: number): Term[] {
  if (m === 0) return [[l, 0, 1, 0]]
  const k = Math.abs(m)
  const sign = k % 2 === 0 ? 1 : -1
  // Cosines (Y_k (−1)^k + Y_−k)/√2 and sines ((−1)^k Y_k − Y_−k)/(i√2), positive towards +x and +y.
  return m > 0 ? [[l, k, sign * Math.SQRT1_2, 0], [l, -k, Math.SQRT1_2, 0]] : [[l, k, 0, -sign * Math.SQRT1_2], [l, -k, 0, Math.SQRT1_2]]
}

/** The matrix of an operator that takes real functions to real ones; what leaves the basis is left out. */
export function matrixOf(basis: HarmonicBasis, action: Action): Sparse {
  const rows: Sparse = Array.from({ length: basis.size }, () => new Map<number, number>())
  basis.each((l, m, column) => {
    const image = new Map<string, Term>()
    for (const [l1, m1, r1, i1] of complexParts(l, m)) {
      for (const [l2, m2, r2, i2] of action(l1, m1)) {
        if (l2 < 0 || Math.abs(m2) > l2) continue
        const key = `${l2} ${m2}`
        const term = image.get(key) ?? [l2, m2, 0, 0]
        image.set(key, [l2, m2, term[2] + r1 * r2 - i1 * i2, term[3] + r1 * i2 + i1 * r2])
      }
    }
    for (const [l2, m2] of image.values()) {
      for (const order of m2 === 0 ? [0] : [Math.abs(m2), -Math.abs(m2)]) {
        if (!basis.has(l2, order)) continue
        const row = basis.index(l2, order)
        if (rows[row]!.has(column)) continue
        let sum = 0
        for (const [l3, m3, re, im] of complexParts(l2, order)) {
          const term = image.get(`${l3} ${m3}`)
          if (term) sum += re * term[2] + im * term[3]
        }
        if (Math.abs(sum) > 1e-15) rows[row]!.set(column, sum)
      }
    }
  })
  return rows
}

/** A·B. */
export function product(a: Sparse, b: Sparse): Sparse {
  return a.map((row) => {
    const out = new Map<number, number>()
    for (const [k, value] of row) for (const [c, other] of b[k]!) out.set(c, (out.get(c) ?? 0) + value * other)
    return out
  })
}

/** Σ factor·matrix. */
export function sum(size: number, parts: readonly (readonly [number, Sparse])[]): Sparse {
  const rows: Sparse = Array.from({ length: size }, () => new Map<number, number>())
  for (const [factor, matrix] of parts) {
    if (factor === 0) continue
    matrix.forEach((row, r) => {
      for (const [c, value] of row) rows[r]!.set(c, (rows[r]!.get(c) ?? 0) + factor * value)
    })
  }
  return rows
}

/** A diagonal matrix from a function of the degree. */
export function diagonal(basis: HarmonicBasis, value: (l: number) => number): Sparse {
  const rows: Sparse = Array.from({ length: basis.size }, () => new Map<number, number>())
  basis.each((l, _, index) => rows[index]!.set(index, value(l)))
  return rows
}

/**
 * Coefficients ∫ f Y of a function given on a grid: heights z with weights, and `turns` even angles from 0; f[k·turns + j] at (z_k, φ_j).
 */
export function harmonicMoments(basis: HarmonicBasis, z: ArrayLike<number>, weights: ArrayLike<number>, turns: number, f: ArrayLike<number>): Float64Array {
  const out = new Float64Array(basis.size)
  const { order, degree, stride } = basis
  const wave = Array.from({ length: turns }, (_, j) => 2 * Math.PI * j / turns)
  const [cosine, sine] = [Math.cos, Math.sin].map(of => Array.from({ length: order + 1 }, (_, m) => Float64Array.from(wave, angle => of(m * angle))))
  const row = new Float64Array(degree + 1)
  for (let k = 0; k < z.length; k++) {
    for (let m = 0; m <= order; m += stride) {
      let [even, odd] = [0, 0]
      for (let j = 0; j < turns; j++) {
        even += f[k * turns + j]! * cosine![m]![j]!
        odd += f[k * turns + j]! * sine![m]![j]!
      }
      const scale = weights[k]! * 2 * Math.PI / turns * (m === 0 ? 1 : Math.SQRT2)
      normalisedLegendre(degree, m, z[k]!, row)
      for (let l = m; l <= degree; l++) {
        out[basis.index(l, m)]! += scale * even * row[l]!
        if (m > 0) out[basis.index(l, -m)]! += scale * odd * row[l]!
      }
    }
  }
  return out
}

/** N_lm P_l^m(z) for l = m … degree, such that with e^{imφ} they are orthonormal on the sphere; all positive at the first zero-free side. */
function normalisedLegendre(degree: number, m: number, z: number, row: Float64Array): void {
  let start = Math.sqrt(1 / (4 * Math.PI))
  const s = Math.sqrt(Math.max(0, 1 - z * z))
  for (let k = 1; k <= m; k++) start *= s * Math.sqrt((2 * k + 1) / (2 * k))
  row[m] = start
  if (m + 1 <= degree) row[m + 1] = Math.sqrt(2 * m + 3) * z * start
  for (let l = m + 2; l <= degree; l++) {
    const a = Math.sqrt((4 * l * l - 1) / (l * l - m * m))
    const b = Math.sqrt(((l - 1) ** 2 - m * m) / (4 * (l - 1) ** 2 - 1))
    row[l] = a * (z * row[l - 1]! - b * row[l - 2]!)
  }
}
