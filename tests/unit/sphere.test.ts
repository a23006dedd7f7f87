import { describe, expect, it } from 'vitest'
import type { DeterministicPath } from '#shared/schemas/answer'
import { momentText, pathAccount } from '~/utils/sphere/account'
import { FLAT, flatPieces, flatPoint, globePieces, timedPieces } from '~/utils/sphere/ink'
import { asPieces, capRim, energyAt, energyContours, equator, gridCurves } from '~/utils/sphere/shapes'
import { cutByLimb, FIRST_VIEW, indexAt, momentAt, rounded, roundedPath, seen, settledAt, shownSpan, turned, turnMatrix, turnsOf } from '~/utils/sphere/view'

/** A spiral from near +z to near −z that crosses z = 0 in the middle and rests for as long again. */
function spiral(turns = 5, samples = 801): DeterministicPath {
  const time: number[] = []
  const m: number[] = []
  for (let k = 0; k < samples; k++) {
    const s = k / (samples - 1)
    const theta = 0.1 + (Math.PI - 0.2) * Math.min(1, 2 * s)
    const phi = 2 * Math.PI * turns * Math.min(1, 2 * s)
    time.push(s * 4e-9)
    m.push(Math.sin(theta) * Math.cos(phi), Math.sin(theta) * Math.sin(phi), Math.cos(theta))
  }
  return { startAngle: 0.1, time, m, crossing: 1e-9, endsFar: true }
}

describe('the view', () => {
  it('turns without stretching', () => {
    const view = { azimuth: 2.1, elevation: -0.7 }
    const axis = (x: number, y: number, z: number): number[] => seen(view, [x, y, z])
    const [a, b, c] = [axis(1, 0, 0), axis(0, 1, 0), axis(0, 0, 1)]
    const dot = (u: number[], v: number[]) => u.reduce((sum, x, k) => sum + x * v[k]!, 0)
    for (const [u, v, wanted] of [[a, a, 1], [b, b, 1], [c, c, 1], [a, b, 0], [b, c, 0], [a, c, 0]] as const) expect(dot(u, v)).toBeCloseTo(wanted, 12)
    // Right-handed: x × y is z, seen.
    expect(a[0]! * (b[1]! * c[2]! - b[2]! * c[1]!) - a[1]! * (b[0]! * c[2]! - b[2]! * c[0]!) + a[2]! * (b[0]! * c[1]! - b[1]! * c[0]!)).toBeCloseTo(1, 12)
    expect(turnMatrix(view)).toHaveLength(9)
  })

  it('has z up and shows the near side of what faces the observer', () => {
    expect(seen(FIRST_VIEW, [0, 0, 1])[1]).toBeGreaterThan(0.9)
    expect(seen(FIRST_VIEW, [Math.cos(0.6), Math.sin(0.6), 0])[2]).toBeGreaterThan(0.9)
    expect(seen(FIRST_VIEW, [0, 0, 1])[0]).toBeCloseTo(0, 12)
  })

  it('never goes over a pole', () => {
    let view = FIRST_VIEW
    for (let k = 0; k < 100; k++) view = turned(view, 0.3, 0.3)
    expect(view.elevation).toBeLessThan(Math.PI / 2)
    expect(Math.abs(view.azimuth)).toBeLessThan(2 * Math.PI)
  })

  it('cuts a great circle into a front and a back half that meet', () => {
    const runs = cutByLimb({ azimuth: 0, elevation: 0.5 }, equator(64))
    expect(new Set(runs.map(run => run.front))).toEqual(new Set([true, false]))
    for (let k = 1; k < runs.length; k++) expect(runs[k]!.points[0]).toEqual(runs[k - 1]!.points[runs[k - 1]!.points.length - 1])
  })
})

describe('the path', () => {
  const path = spiral()

  it('is read between samples on the sphere', () => {
    const t = (path.time[10]! + path.time[11]!) / 2
    expect(Math.hypot(...momentAt(path, t))).toBeCloseTo(1, 12)
    expect(momentAt(path, 1e-9)[2]).toBeCloseTo(0, 3)
    expect(momentAt(path, -1)).toEqual(momentAt(path, path.time[0]!))
    expect(momentAt(path, 1)[2]).toBeCloseTo(-Math.cos(0.1), 6)
    expect(indexAt([0, 1, 2, 3], 1.5)).toBe(1)
    expect(indexAt([0, 1, 2, 3], 9)).toBe(3)
  })

  it('is shown until it rests', () => {
    expect(settledAt(path)).toBeGreaterThan(1.7e-9)
    expect(settledAt(path)).toBeLessThan(2.01e-9)
    const span = shownSpan(path)
    expect(span.rests).not.toBeNull()
    expect(span.end).toBeLessThan(2.4e-9)
    const restless: DeterministicPath = { ...path, time: path.time.slice(0, 380), m: path.m.slice(0, 1140) }
    const still: DeterministicPath = { ...path, m: path.m.map((_, k) => k % 3 === 2 ? 1 : 0) }
    expect(shownSpan(still).end).toBe(4e-9)
    expect(shownSpan(restless)).toEqual({ start: 0, end: restless.time[379]!, rests: null })
  })

  it('is rounded between samples without leaving them or the sphere', () => {
    const coarse = spiral(5, 121)
    const fine = roundedPath(coarse, 4)
    expect(fine.time).toHaveLength(481)
    expect(fine.time[4]).toBe(coarse.time[1])
    expect(fine.m.slice(12, 15).map(c => Number(c.toFixed(6)))).toEqual(coarse.m.slice(3, 6).map(c => Number(c.toFixed(6))))
    const exact = spiral(5, 481)
    for (let k = 0; k < 220; k++) expect(Math.hypot(...[0, 1, 2].map(axis => fine.m[3 * k + axis]! - exact.m[3 * k + axis]!))).toBeLessThan(0.006)
    for (let k = 0; k <= 480; k++) expect(Math.hypot(fine.m[3 * k]!, fine.m[3 * k + 1]!, fine.m[3 * k + 2]!)).toBeCloseTo(1, 6)
    expect([...rounded([1, 0, 0, 0, 1, 0], 4)]).toEqual([1, 0, 0, 0, 1, 0])
  })

  it('is told in words', () => {
    expect(turnsOf(path)).toBeCloseTo(5, 1)
    const words = pathAccount(path, 1).replaceAll('\u202F', ' ')
    expect(words).toContain('near pole (parallel)')
    expect(words).toContain('crosses the equator at 1.000 ns')
    expect(words).toContain('far pole (antiparallel)')
    expect(pathAccount({ ...path, crossing: null, endsFar: false }, -1)).toContain('does not cross')
    expect(momentText([0.001, -0.5, -0.001])).toBe('m = (0.00, −0.50, 0.00)')
  })

  it('is coloured from first to last within the span, without gaps', () => {
    const pieces = timedPieces(path, 0, 2e-9)
    expect(pieces[0]!.share).toBeLessThan(0.05)
    expect(pieces[pieces.length - 1]!.share).toBe(1)
    for (let k = 1; k < pieces.length; k++) expect(pieces[k]!.first).toBe(pieces[k - 1]!.last)
    expect(globePieces(path, FIRST_VIEW, { start: 0, end: 2e-9 }).some(piece => piece.front)).toBe(true)
  })

  it('lies in the near disc first and in the far one later', () => {
    const pieces = flatPieces(path, 1, { start: 0, end: 2e-9 })
    expect(pieces[0]!.front).toBe(true)
    expect(pieces[pieces.length - 1]!.front).toBe(false)
    for (const { d } of pieces) for (const [, x] of d.matchAll(/[ML]([\d.]+)/g)) expect(Math.abs(Number(x) - 200)).toBeLessThanOrEqual(FLAT.far.x - 200 + FLAT.radius + 0.1)
  })
})

describe('shapes', () => {
  const norms = (points: ArrayLike<number>) => Array.from({ length: points.length / 3 }, (_, k) => Math.hypot(points[3 * k]!, points[3 * k + 1]!, points[3 * k + 2]!))

  it('lie on the sphere', () => {
    for (const curve of [...gridCurves(), equator(), capRim(1), capRim(-1)]) expect(Math.max(...norms(curve).map(norm => Math.abs(norm - 1)))).toBeLessThan(1e-12)
    expect(capRim(-1)[2]).toBeLessThan(-0.9)
  })

  it('become pieces of start and end', () => {
    expect([...asPieces([[1, 0, 0, 0, 1, 0, 0, 0, 1], [0, 0, 1]])]).toEqual([1, 0, 0, 0, 1, 0, 0, 1, 0, 0, 0, 1])
  })

  it('of equal energy are equal in energy', () => {
    const h = { diagonal: [0, -0.4, 1], field: [0.2, -0.1, 0.15] } as const
    const pieces = energyContours(h, 5, 90)
    expect(pieces.length).toBeGreaterThan(600)
    for (let k = 0; k < pieces.length; k += 6) {
      const [a, b] = [energyAt(pieces[k]!, pieces[k + 1]!, pieces[k + 2]!, h), energyAt(pieces[k + 3]!, pieces[k + 4]!, pieces[k + 5]!, h)]
      expect(Math.abs(a - b)).toBeLessThan(0.02)
    }
  })

  it('of equal energy without a field are parallels', () => {
    const pieces = energyContours({ diagonal: [0, 0, 1], field: [0, 0, 0] }, 3)
    for (let k = 0; k < pieces.length; k += 6) expect(Math.abs(Math.abs(pieces[k + 2]!) - Math.abs(pieces[k + 5]!))).toBeLessThan(1e-6)
  })

  it('keeps both hemispheres inside their discs, of equal area', () => {
    for (const side of [1, -1] as const) {
      expect(Math.hypot(...flatPoint([1, 0, 0], side))).toBeCloseTo(1, 12)
      expect(Math.hypot(...flatPoint([Math.sin(1.0), 0, side * Math.cos(1.0)], side)) ** 2).toBeCloseTo(1 - Math.cos(1.0), 12)
      expect(flatPoint([0, 0, side], side)).toEqual([0, 0])
    }
  })
})
