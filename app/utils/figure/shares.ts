import { scaleLog } from 'd3-scale'
import type { Proportion } from '#shared/schemas/answer'

export interface ShareStrip {
  ticks: { at: number, text: string, exponent: string | null, anchor: 'start' | 'middle' | 'end' }[]
  bars: { low: number, high: number, value: number | null }[]
}

const LEFT = 6
const RIGHT = 394

/** Shares and their intervals on one logarithmic axis from the decade of the smallest bound to one. A share of 0 has no point, only its bound. */
export function shareStrip(shares: readonly Proportion[]): ShareStrip {
  const positive = shares.flatMap(share => share.count > 0 ? [share.low] : [share.high / 10])
  const lowest = Math.floor(Math.log10(Math.max(1e-12, Math.min(...positive))) + 1e-9)
  const scale = scaleLog([10 ** Math.min(lowest, -1), 1], [LEFT, RIGHT])
  const at = (value: number) => scale(Math.max(value, scale.domain()[0]!))
  const exponents = Array.from({ length: 1 - Math.min(lowest, -1) }, (_, k) => -k)
  const every = Math.ceil(exponents.length / 7)
  return {
    ticks: exponents.filter(e => -e % every === 0).map(e => ({ at: scale(10 ** e), text: e === 0 ? '1' : '10', exponent: e === 0 ? null : String(e).replace('-', '\u2212'), anchor: e === 0 ? 'end' : scale(10 ** e) < 20 ? 'start' : 'middle' })),
    bars: shares.map(share => ({ low: share.count > 0 ? at(share.low) : LEFT, high: at(share.high), value: share.count > 0 ? at(share.value) : null })),
  }
}
