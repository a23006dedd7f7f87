import { formatPlain } from '#shared/utils/quantity'
import { POLES, timeText } from '../sphere/account'
import type { PreviewPath } from './preview'

/** When the path without noise crosses, in large words, and from where it started, in small ones. */
export function liveWords({ path, spec }: PreviewPath): { big: string, note: string } {
  const near = spec.write.direction === 'parallelToAntiparallel' ? 1 : -1
  const from = `Without noise, from the rms angle of the well (${(path.startAngle * 180 / Math.PI).toFixed(1)}° from ${POLES[near]}).`
  if (path.crossing === null) return { big: `stays ${POLES[near]}`, note: `${from} It does not cross the equator in ${formatPlain(path.time[path.time.length - 1]!, 'time', 'ns')}; with noise some writes may.` }
  if (!path.endsFar) return { big: `crosses at ${timeText(path.crossing, 4)}`, note: `${from} It falls back to ${POLES[near]} afterwards.` }
  return { big: `crosses at ${timeText(path.crossing, 4)}`, note: `${from} ${spec.question.kind !== 'motion' ? 'Noise spreads this; how widely, the trials will say.' : 'The paths with noise spread around this one.'}` }
}
