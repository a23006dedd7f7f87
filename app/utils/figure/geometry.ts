import { scaleLinear, scaleLog } from 'd3-scale'
import { area, line } from 'd3-shape'
import type { Axis } from './model'

export interface Box { left: number, right: number, top: number, bottom: number }
export interface Tick { value: number, at: number, text: string, exponent: string | null }
export interface AxisScale { (value: number): number, invert: (pixel: number) => number }

/** Pixel position of a value; on a logarithmic axis whatever is not above the domain's start lies on its start. */
export function scaleOf(axis: Axis, range: readonly [number, number]): AxisScale {
  const [first, last] = axis.domain
  const scale = axis.kind === 'log' ? scaleLog([first, last], [...range]) : scaleLinear([first, last], [...range])
  const place = (value: number) => scale(axis.kind === 'log' ? Math.max(value, first) : value)
  return Object.assign(place, { invert: (pixel: number) => scale.invert(pixel) })
}

const MINUS = '\u2212'

/** Ticks at round values; powers of ten on a logarithmic axis, thinned to what there is room for. */
export function ticksOf(axis: Axis, scale: AxisScale, most: number): Tick[] {
  const [first, last] = axis.domain
  if (axis.kind === 'linear') {
    const linear = scaleLinear([first, last], [0, 1])
    const values = linear.ticks(most)
    const format = linear.tickFormat(most)
    return values.map(value => ({ value, at: scale(value), text: format(value).replace('-', MINUS), exponent: null }))
  }
  const low = Math.ceil(Math.log10(first) - 1e-9)
  const high = Math.floor(Math.log10(last) + 1e-9)
  const every = Math.max(1, Math.ceil((high - low + 1) / most))
  const exponents = Array.from({ length: high - low + 1 }, (_, k) => high - k).filter((_, k) => k % every === 0)
  return exponents.map(e => ({ value: 10 ** e, at: scale(10 ** e), text: e === 0 ? '1' : '10', exponent: e === 0 || e === 1 ? null : String(e).replace('-', MINUS) }))
}

/** Path data of a polyline; gaps where a value is not finite. More samples than columns of pixels are thinned without losing extremes. */
export function linePath(x: ArrayLike<number>, y: ArrayLike<number>, toX: AxisScale, toY: AxisScale, columns: number): string {
  const kept = x.length > 3 * columns ? thin(x, y, columns) : Array.from({ length: x.length }, (_, k) => k)
  const draw = line<number>().defined(k => Number.isFinite(y[k])).x(k => round(toX(x[k]!))).y(k => round(toY(y[k]!)))
  return draw(kept) ?? ''
}

export function bandPath(x: ArrayLike<number>, low: ArrayLike<number>, high: ArrayLike<number>, toX: AxisScale, toY: AxisScale): string {
  const draw = area<number>().x(k => round(toX(x[k]!))).y0(k => round(toY(low[k]!))).y1(k => round(toY(high[k]!)))
  return draw(Array.from({ length: x.length }, (_, k) => k)) ?? ''
}

const round = (pixel: number) => Math.round(pixel * 100) / 100

/** Indices of the first, lowest, highest and last sample of each column, in order. `x` ascends. */
export function thin(x: ArrayLike<number>, y: ArrayLike<number>, columns: number): number[] {
  const start = x[0]!
  const width = (x[x.length - 1]! - start) / columns
  const kept: number[] = []
  let k = 0
  for (let column = 0; column < columns && k < x.length; column++) {
    const end = column === columns - 1 ? Infinity : start + (column + 1) * width
    const from = k
    let low = k
    let high = k
    for (; k < x.length && x[k]! < end; k++) {
      if (y[k]! < y[low]!) low = k
      if (y[k]! > y[high]!) high = k
    }
    if (k > from) kept.push(...new Set([from, Math.min(low, high), Math.max(low, high), k - 1]))
  }
  return kept
}

/** Index of the reading closest to a value; readings ascend in x. */
export function nearest(readings: readonly { x: number }[], value: number): number {
  let best = 0
  for (let k = 1; k < readings.length; k++) if (Math.abs(readings[k]!.x - value) < Math.abs(readings[best]!.x - value)) best = k
  return best
}
