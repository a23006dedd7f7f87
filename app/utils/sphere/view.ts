import type { DeterministicPath } from '#shared/schemas/answer'

/** From where the sphere is seen, rad: the observer's azimuth about z and height above the equator. */
export interface View { azimuth: number, elevation: number }
export type Vec3 = readonly [number, number, number]

/** Seen from a little above, so that both caps and the equator's ellipse show. */
export const FIRST_VIEW: View = { azimuth: 0.6, elevation: 0.38 }

const STEEPEST = Math.PI / 2 - 0.02

/** The view after turning by two angles; never over a pole. */
export const turned = ({ azimuth, elevation }: View, right: number, up: number): View => ({
  azimuth: (azimuth + right) % (2 * Math.PI),
  elevation: Math.min(STEEPEST, Math.max(-STEEPEST, elevation + up)),
})

/**
 * The rotation into the observer's frame (x right, y up, z towards the observer) by columns, as a shader's mat3 wants it:
 * element [3c + r] is row r, column c.
 */
export function turnMatrix({ azimuth, elevation }: View): number[] {
  const [ca, sa, ce, se] = [Math.cos(azimuth), Math.sin(azimuth), Math.cos(elevation), Math.sin(elevation)]
  return [-sa, -ca * se, ca * ce, ca, -sa * se, sa * ce, 0, ce, se]
}

/** A point in the observer's frame: right, up, towards the observer. */
export function seen(view: View, [x, y, z]: Vec3): [number, number, number] {
  const m = turnMatrix(view)
  return [m[0]! * x + m[3]! * y + m[6]! * z, m[1]! * x + m[4]! * y + m[7]! * z, m[2]! * x + m[5]! * y + m[8]! * z]
}

/** A curve through points of the unit sphere, cut where it passes behind the limb. Screen coordinates in radii, y down. */
export function cutByLimb(view: View, points: ArrayLike<number>, first = 0, last = points.length / 3 - 1): { front: boolean, points: [number, number][] }[] {
  const runs: { front: boolean, points: [number, number][] }[] = []
  for (let k = first; k <= last; k++) {
    const [right, up, near] = seen(view, [points[3 * k]!, points[3 * k + 1]!, points[3 * k + 2]!])
    const front = near >= 0
    const run = runs[runs.length - 1]
    if (run && run.front === front) run.points.push([right, -up])
    else {
      // Joined to the run before, so that no gap shows at the limb.
      const joint = run?.points[run.points.length - 1]
      runs.push({ front, points: joint ? [joint, [right, -up]] : [[right, -up]] })
    }
  }
  return runs.filter(run => run.points.length > 1)
}

/** An SVG path through screen points, scaled and shifted. */
export const svgPath = (points: readonly (readonly [number, number])[], radius = 1, cx = 0, cy = 0): string =>
  points.map(([x, y], k) => `${k === 0 ? 'M' : 'L'}${(cx + radius * x).toFixed(1)} ${(cy + radius * y).toFixed(1)}`).join('')

/** m at a time between the samples, normalised; the ends beyond them. */
export function momentAt({ time, m }: Pick<DeterministicPath, 'time' | 'm'>, t: number): [number, number, number] {
  const k = indexAt(time, t)
  const [t0, t1] = [time[k]!, time[Math.min(k + 1, time.length - 1)]!]
  const f = t1 > t0 ? Math.min(1, Math.max(0, (t - t0) / (t1 - t0))) : 0
  const next = Math.min(k + 1, time.length - 1)
  const v = [0, 1, 2].map(axis => (1 - f) * m[3 * k + axis]! + f * m[3 * next + axis]!)
  const norm = Math.hypot(v[0]!, v[1]!, v[2]!) || 1
  return [v[0]! / norm, v[1]! / norm, v[2]! / norm]
}

/** Index of the last sample not after t, 0 at least. */
export function indexAt(time: readonly number[], t: number): number {
  let low = 0
  let high = time.length - 1
  while (low < high) {
    const middle = (low + high + 1) >> 1
    if (time[middle]! <= t) low = middle
    else high = middle - 1
  }
  return low
}

/**
 * Time from which on the path stays within 1 % of where it ends along z: what follows is rest. The end of the path where it is still
 * on its way or never left.
 */
export function settledAt({ time, m }: Pick<DeterministicPath, 'time' | 'm'>): number {
  const last = time.length - 1
  const end = m[3 * last + 2]!
  let k = last
  while (k > 0 && Math.abs(m[3 * k + 2]! - end) < 0.01) k--
  if (k === 0) return time[last]!
  return time[Math.min(last, k + 1)]!
}

/** The stretch of time worth looking at: until it has come to rest and a little more, or all of it. */
export function shownSpan(path: Pick<DeterministicPath, 'time' | 'm'>): { start: number, end: number, rests: number | null } {
  const start = path.time[0]!
  const last = path.time[path.time.length - 1]!
  const settled = settledAt(path)
  const end = start + (settled - start) * 1.15
  return end < start + (last - start) * 0.9 && settled > start ? { start, end, rests: settled } : { start, end: last, rests: null }
}

/** Turns of the precession about z, counted from the azimuth. */
export function turnsOf({ m }: Pick<DeterministicPath, 'm'>): number {
  let sum = 0
  for (let k = 3; k < m.length; k += 3) {
    const [x0, y0, x1, y1] = [m[k - 3]!, m[k - 2]!, m[k]!, m[k + 1]!]
    if (x0 * x0 + y0 * y0 > 1e-8) sum += Math.atan2(x0 * y1 - y0 * x1, x0 * x1 + y0 * y1)
  }
  return Math.abs(sum) / (2 * Math.PI)
}

/**
 * Points between the samples of a smooth curve on the sphere, by cubic interpolation: `factor` pieces for each interval of equal time,
 * so that a turn of few samples is round.
 */
export function rounded(m: ArrayLike<number>, factor: number): Float32Array {
  const last = m.length / 3 - 1
  if (last < 2 || factor <= 1) return new Float32Array(m)
  const out = new Float32Array((last * factor + 1) * 3)
  const at = (k: number, axis: number) => m[3 * Math.min(last, Math.max(0, k)) + axis]!
  for (let k = 0; k <= last; k++) {
    const pieces = k === last ? 1 : factor
    for (let n = 0; n < pieces; n++) {
      const f = n / factor
      const v = [0, 1, 2].map((axis) => {
        const [a, b, c, d] = [at(k - 1, axis), at(k, axis), at(k + 1, axis), at(k + 2, axis)]
        return b + f * ((c - a) / 2 + f * (a - 2.5 * b + 2 * c - d / 2 + f * (1.5 * (b - c) + (d - a) / 2)))
      })
      const norm = Math.hypot(v[0]!, v[1]!, v[2]!) || 1
      for (let axis = 0; axis < 3; axis++) out[3 * (k * factor + n) + axis] = v[axis]! / norm
    }
  }
  return out
}

/** A path with rounded turns: the same curve with `factor` times the samples. */
export function roundedPath<P extends Pick<DeterministicPath, 'time' | 'm'>>(path: P, factor: number): P {
  const last = path.time.length - 1
  const time = Array.from({ length: last * factor + 1 }, (_, k) => {
    const [before, n] = [Math.floor(k / factor), k % factor]
    return path.time[before]! + (n === 0 ? 0 : (path.time[before + 1]! - path.time[before]!) * n / factor)
  })
  return { ...path, time, m: Array.from(rounded(path.m, factor)) }
}
