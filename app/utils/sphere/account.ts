import type { DeterministicPath } from '#shared/schemas/answer'
import { formatPrefixed } from '#shared/utils/quantity'
import { formatNumber } from '#shared/utils/format'
import { momentAt, turnsOf } from './view'

export const POLES = { 1: 'parallel', '-1': 'antiparallel' } as const

/** "1.35 ns" */
export const timeText = (t: number, digits = 3): string => formatPrefixed(t, 's', digits)

/** "m = (0.52, −0.30, 0.01)" */
export const momentText = (m: readonly [number, number, number]): string =>
  `m = (${m.map(c => c.toFixed(2).replace('-', '−').replace(/^−(0\.00)$/, '$1')).join(', ')})`

/** The path in words, for those who do not see it. */
export function pathAccount(path: DeterministicPath, near: 1 | -1): string {
  const far = near === 1 ? -1 : 1
  const end = path.time[path.time.length - 1]!
  const last = momentAt(path, end)
  const angle = Math.acos(Math.min(1, Math.max(-1, (path.endsFar ? far : near) * last[2]))) * 180 / Math.PI
  const crossing = path.crossing === null ? 'It does not cross the equator' : `It crosses the equator at ${timeText(path.crossing, 4)}`
  return `The path without noise starts ${formatNumber(path.startAngle * 180 / Math.PI, 3)}° from the near pole (${POLES[near]}) and turns about the axis ${formatNumber(turnsOf(path), 3)} times. `
    + `${crossing} and ends ${formatNumber(angle, 2)}° from the ${path.endsFar ? `far pole (${POLES[far]})` : `near pole (${POLES[near]})`} at ${timeText(end, 4)}.`
}
