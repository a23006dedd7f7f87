import type { Write } from '../schemas/job'
import type { Segment } from '../numerics/macrospin'
import { PhysicsError } from './errors'

/** A stretch of the waveform over which the drive is linear, in seconds and multiples of the amplitude. */
export type Piece = Omit<Segment, 'steps'>

/**
 * One trapezoid. Time 0 is the leading half amplitude; the width runs from half amplitude to half amplitude, so the rise starts at −edge/2
 * and the fall ends at width + edge/2.
 */
function trapezoid(width: number, edge: number, at = 0, height = 1): Piece[] {
  const pieces = edge > 0 ? [{ start: at - edge / 2, end: at + edge / 2, from: 0, to: height }] : []
  if (width > edge) pieces.push({ start: at + edge / 2, end: at + width - edge / 2, from: height, to: height })
  if (edge > 0) pieces.push({ start: at + width - edge / 2, end: at + width + edge / 2, from: height, to: 0 })
  return pieces
}

/** The waveform of a write as linear pieces, one after the other without gaps. @throws PhysicsError where parts of it overlap */
export function waveformPieces({ width, edge, waveform }: Write): Piece[] {
  if (!waveform) return trapezoid(width, edge)
  if (waveform.kind === 'points') return fromPoints(waveform, width)
  const rest = (start: number, end: number): Piece[] => end > start ? [{ start, end, from: 0, to: 0 }] : []
  if (waveform.kind === 'train') {
    if (waveform.period < width + edge) throw new PhysicsError(['write', 'waveform', 'period'], 'The pulses of the train overlap: the period is at least the width and one edge.')
    return Array.from({ length: waveform.pulses }, (_, n) => [
      ...trapezoid(width, edge, n * waveform.period),
      ...(n + 1 < waveform.pulses ? rest(n * waveform.period + width + edge / 2, (n + 1) * waveform.period - edge / 2) : []),
    ]).flat()
  }
  if (waveform.reverseWidth < edge) throw new PhysicsError(['write', 'waveform', 'reverseWidth'], 'An edge longer than the reverse pulse never reaches its amplitude.')
  const second = width + waveform.gap + edge
  return [...trapezoid(width, edge), ...rest(width + edge / 2, second - edge / 2), ...trapezoid(waveform.reverseWidth, edge, second, -waveform.reverseRatio)]
}

/** Times of the first and the last half amplitude of a list of points, s. */
export function halfAmplitudes(time: readonly number[], amplitude: readonly number[]): { first: number, last: number } {
  const half = Math.max(...amplitude.map(Math.abs)) / 2
  const crossing = (k: number, step: 1 | -1) => {
    const [outer, inner] = [Math.abs(amplitude[k - step]!), Math.abs(amplitude[k]!)]
    return time[k - step]! + (half - outer) / (inner - outer) * (time[k]! - time[k - step]!)
  }
  const above = (a: number) => Math.abs(a) >= half
  const first = amplitude.findIndex(above)
  const last = amplitude.findLastIndex(above)
  return {
    first: first === 0 ? time[0]! : crossing(first, 1),
    last: last === amplitude.length - 1 ? time[last]! : crossing(last, -1),
  }
}

function fromPoints({ time, amplitude }: { time: number[], amplitude: number[] }, width: number): Piece[] {
  const at = (place: (string | number)[]) => ['write', 'waveform', ...place]
  if (time.length !== amplitude.length) throw new PhysicsError(at(['amplitude']), `There are ${time.length} times and ${amplitude.length} amplitudes.`)
  const back = time.findIndex((t, k) => k > 0 && t < time[k - 1]!)
  if (back > 0) throw new PhysicsError(at(['time']), `Point ${back + 1} lies before point ${back}: times ascend.`)
  if (!amplitude.some(a => a !== 0)) throw new PhysicsError(at(['amplitude']), 'The drive is zero throughout.')
  const { first, last } = halfAmplitudes(time, amplitude)
  if (Math.abs(last - first - width) > 1e-6 * width) {
    throw new PhysicsError(['write', 'width'], `The width of these points, half amplitude to half amplitude, is ${((last - first) * 1e9).toPrecision(7)} ns.`)
  }
  return time.slice(1).flatMap((t, k) => t > time[k]! ? [{ start: time[k]! - first, end: t - first, from: amplitude[k]!, to: amplitude[k + 1]! }] : [])
}

/** Time for which the drive acts, weighted with its amplitude, s: the width of a single pulse. */
export function drivenTime(write: Write): number {
  if (!write.waveform) return write.width
  return waveformPieces(write).reduce((sum, { start, end, from, to }) => {
    const mean = from * to >= 0 ? Math.abs(from + to) / 2 : (from * from + to * to) / (2 * Math.abs(from - to))
    return sum + mean * (end - start)
  }, 0)
}

/** Each piece in equal steps no longer than `step`, s. */
export const cutIntoSteps = (pieces: readonly Piece[], step: number): Segment[] =>
  pieces.map(piece => ({ ...piece, steps: Math.max(1, Math.ceil((piece.end - piece.start) / step * (1 - 1e-12))) }))

/** The trapezoid as linear pieces of equal steps no longer than `step`, in seconds. */
export const pulseSegments = (width: number, edge: number, step: number): Segment[] => cutIntoSteps(trapezoid(width, edge), step)
