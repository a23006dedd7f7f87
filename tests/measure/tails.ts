import { openKernel } from '#shared/kernels/loader'
import { philox } from '#shared/numerics/philox'

export const name = 'normal numbers of the kernel: 10⁹ draws'

const DRAWS = 1_000_000_000
const BATCH = 250_000
const BINS = 4096
const REACH = 6.5
/** Two-sided tails of the standard normal distribution (Abramowitz & Stegun, table 26.1, and erfc). */
const TAILS = [[1, 0.31731050786], [2, 0.045500263896], [3, 0.0026997960633], [4, 6.3342483666e-5], [5, 5.7330314376e-7], [5.5, 3.7978e-8], [6, 1.9731752901e-9]] as const

/** Φ by its own series and continued fraction (Abramowitz & Stegun 26.2.10, 26.2.14). */
function normalCdf(x: number): number {
  const z = Math.abs(x)
  const density = Math.exp(-z * z / 2) / Math.sqrt(2 * Math.PI)
  let upper: number
  if (z < 3) {
    let [term, sum] = [z, z]
    for (let n = 1; n < 200; n++) {
      term *= z * z / (2 * n + 1)
      sum += term
    }
    upper = 0.5 - density * sum
  }
  else {
    let fraction = 0
    for (let n = 200; n >= 1; n--) fraction = n / (z + fraction)
    upper = density / (z + fraction)
  }
  return x > 0 ? 1 - upper : upper
}

export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const kernel = openKernel('simd')
  const base = 8192
  const missing = Math.ceil((base + 16 * BATCH - kernel.memory.buffer.byteLength) / 65536)
  if (missing > 0) kernel.memory.grow(missing)
  const seeds = new Uint32Array(4)
  const state = new Uint32Array(kernel.memory.buffer, 48, 16)
  for (let lane = 0; lane < 4; lane++) {
    philox(0, 0, lane, 0, 20_261, 7, seeds)
    for (let word = 0; word < 4; word++) state[4 * word + lane] = seeds[word]!
  }
  const values = new Float32Array(kernel.memory.buffer, base, 4 * BATCH)
  const bins = new Float64Array(BINS)
  const beyond = TAILS.map(() => 0)
  const sums = [0, 0, 0, 0]
  for (let done = 0; done < DRAWS; done += 4 * BATCH) {
    kernel.normals(base, BATCH)
    let [first, second, third, fourth] = [0, 0, 0, 0]
    for (const g of values) {
      const square = g * g
      first += g
      second += square
      third += g * square
      fourth += square * square
      bins[Math.floor((g + REACH) * (BINS / (2 * REACH)))]! += 1
      if (square > 1) for (let k = 0; k < TAILS.length && square > TAILS[k]![0] ** 2; k++) beyond[k]! += 1
    }
    for (const [k, sum] of [first, second, third, fourth].entries()) sums[k]! += sum
  }
  let [passed, distance] = [0, 0]
  for (let k = 0; k < BINS; k++) {
    passed += bins[k]!
    distance = Math.max(distance, Math.abs(passed / DRAWS - normalCdf(-REACH + (k + 1) * 2 * REACH / BINS)))
  }
  const n = Math.sqrt(DRAWS)
  return [
    { metric: 'mean, in standard errors', value: sums[0]! / n, unit: 'σ' },
    { metric: 'variance', value: (sums[1]! / DRAWS - 1) * n / Math.sqrt(2), unit: 'σ' },
    { metric: 'third moment', value: sums[2]! / n / Math.sqrt(15), unit: 'σ' },
    { metric: 'fourth moment', value: (sums[3]! / DRAWS - 3) * n / Math.sqrt(96), unit: 'σ' },
    { metric: 'Kolmogorov–Smirnov: D √n (5 % beyond 1.36)', value: distance * n, unit: '' },
    ...TAILS.flatMap(([at, share], k) => [
      { metric: `draws beyond ${at}σ`, value: beyond[k]!, unit: '' },
      { metric: `against the ${(share * DRAWS).toPrecision(4)} expected`, value: (beyond[k]! - share * DRAWS) / Math.sqrt(share * DRAWS), unit: 'σ' },
    ]),
  ]
}
