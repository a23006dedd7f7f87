/**
 * Numbers of (−1, 1) counted in equal levels: what many observers saw can be put together in any order and is the same to the last bit,
 * and takes no more room for more of them.
 */
export const LEVELS = 200

/** Level of a number of (−1, 1). */
export const levelOf = (value: number): number => Math.min(LEVELS - 1, Math.max(0, Math.floor((value + 1) / 2 * LEVELS)))

/** Middle of a level. */
export const levelMiddle = (level: number): number => (2 * level + 1) / LEVELS - 1

/**
 * Quantile of what was counted, linear within a level, clear of the ends by no more than a level.
 * @param counts of the LEVELS levels from `offset` on
 * @param share 0 to 1
 */
export function levelQuantile(counts: ArrayLike<number>, offset: number, share: number): number {
  let total = 0
  for (let k = 0; k < LEVELS; k++) total += counts[offset + k]!
  let passed = 0
  for (let k = 0; k < LEVELS; k++) {
    const here = counts[offset + k]!
    if (here > 0 && passed + here >= share * total) return 2 * (k + (share * total - passed) / here) / LEVELS - 1
    passed += here
  }
  return 1
}

/** Mean of a function over what was counted, taken at the middles of the levels. */
export function levelMean(counts: ArrayLike<number>, offset: number, f: (value: number) => number): number {
  let total = 0
  let sum = 0
  for (let k = 0; k < LEVELS; k++) {
    const here = counts[offset + k]!
    if (here === 0) continue
    total += here
    sum += here * f(levelMiddle(k))
  }
  return sum / total
}
