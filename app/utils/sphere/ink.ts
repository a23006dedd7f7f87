import type { DeterministicPath } from '#shared/schemas/answer'
import { cutByLimb, indexAt, svgPath, type View } from './view'

/** Frame of every drawing of the sphere: a square of 400 with the sphere in its middle. */
export const FRAME = 400
export const RADIUS = 170
const PIECES = 72

export interface InkedPiece { d: string, share: number, front: boolean }

/** Indices of the samples between two times, cut into pieces of one colour each, with the share of the stretch that each stands for. */
export function timedPieces({ time }: Pick<DeterministicPath, 'time'>, from: number, to: number): { first: number, last: number, share: number }[] {
  const total = time.length - 1
  const [a, b] = [indexAt(time, from), Math.max(indexAt(time, from) + 1, indexAt(time, to))]
  const step = Math.max(1, Math.ceil((b - a) / PIECES))
  const pieces = []
  for (let first = 0; first < total; first += step) {
    const last = Math.min(total, first + step)
    pieces.push({ first, last, share: Math.min(1, Math.max(0, ((first + last) / 2 - a) / (b - a))) })
  }
  return pieces
}

/** The path as it is seen on the globe, coloured piece by piece. */
export const globePieces = (path: DeterministicPath, view: View, span: { start: number, end: number }): InkedPiece[] =>
  timedPieces(path, span.start, span.end).flatMap(({ first, last, share }) =>
    cutByLimb(view, path.m, first, last).map(run => ({ d: svgPath(run.points, RADIUS, FRAME / 2, FRAME / 2), share, front: run.front })))

/** Radius of one hemisphere's disc in the flat view, and where its centre stands. */
export const FLAT = { radius: 94, near: { x: 101, y: 190 }, far: { x: 299, y: 190 } } as const

/** Equal-area projection of one hemisphere as seen from outside, in radii of the disc, y down. */
export function flatPoint([x, y, z]: readonly [number, number, number], side: 1 | -1): [number, number] {
  const q = Math.hypot(x, y)
  const r = Math.sqrt(Math.max(0, 1 - side * z))
  return q < 1e-12 ? [0, 0] : [side * x / q * r, -y / q * r]
}

/** The path on the two discs, coloured piece by piece; `front`: in the near pole's disc. */
export const flatPieces = (path: DeterministicPath, near: 1 | -1, span: { start: number, end: number }): InkedPiece[] =>
  timedPieces(path, span.start, span.end).flatMap(({ first, last, share }) => {
    const runs: InkedPiece[] = []
    let points: [number, number][] = []
    let at: 1 | -1 | null = null
    const close = () => {
      if (at !== null && points.length > 1) {
        const centre = at === near ? FLAT.near : FLAT.far
        runs.push({ d: svgPath(points, FLAT.radius, centre.x, centre.y), share, front: at === near })
      }
      points = []
    }
    for (let k = first; k <= last; k++) {
      const m = [path.m[3 * k]!, path.m[3 * k + 1]!, path.m[3 * k + 2]!] as const
      const side = m[2] >= 0 ? 1 : -1
      if (side !== at) close()
      at = side
      points.push(flatPoint(m, side))
    }
    close()
    return runs
  })
