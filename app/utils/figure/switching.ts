import type { SwitchingAnswer } from '#shared/schemas/answer'
import { formatCount, formatShare } from '#shared/utils/format'
import type { ErrorPoint, FigureModel, Label, Mark } from './model'

const NANO = 1e9
const ns = (t: number) => t * NANO
const figureNs = (t: number) => `${(t * NANO).toPrecision(3)} ns`

/** Where the noiseless path crosses, and where the pulse ends when that lies within the axis. */
function timeMarks(answer: SwitchingAnswer, row: number): Mark[] {
  const { crossing } = answer.deterministic
  return crossing === null ? [] : [{ axis: 'x', at: ns(crossing), tone: 'far', text: `without noise ${figureNs(crossing)}`, row }]
}

/** When the trials that crossed did so, with their mean and the noiseless crossing. Null when none crossed. */
export function distributionFigure(answer: SwitchingAnswer, stem: string): FigureModel | null {
  const { edges, counts } = answer.histogram
  if (counts.length === 0) return null
  const { mean, spread, crossed } = answer.time
  const marks: Mark[] = [
    ...(mean ? [{ axis: 'x', at: ns(mean.value), tone: 'ink', text: `mean ${figureNs(mean.value)}`, row: 0 } as const] : []),
    ...timeMarks(answer, 1),
  ]
  const apart = apartMarks(marks, ns(edges[edges.length - 1]!))
  const last = Math.max(edges[edges.length - 1]!, answer.deterministic.crossing ?? 0)
  const bins = counts.map((count, k) => ({ from: ns(edges[k]!), to: ns(edges[k + 1]!), count }))
  const statistics = mean && spread ? `Mean ${figureNs(mean.value)}, spread ${figureNs(spread.value)}` : 'Too few for a mean'
  return {
    name: `${stem}-distribution`,
    title: 'When they switched',
    summary: `${statistics}; ${formatCount(crossed)} of ${formatCount(answer.trials)} trials crossed the equator during the pulse.`,
    x: { label: 'switching time', unit: 'ns', kind: 'linear', domain: [Math.min(0, ns(edges[0]!)), ns(last) * 1.03] },
    y: { label: 'trials in a bin', unit: '', kind: 'linear', domain: [0, Math.max(...counts) * 1.28] },
    layers: [{ kind: 'bars', edges: edges.map(ns), heights: counts, tone: 'near' }],
    marks: apart,
    labels: [],
    readings: bins.map(({ from, to, count }) => ({ x: (from + to) / 2, y: count, text: `${from.toFixed(3)} to ${to.toFixed(3)} ns: ${formatCount(count)} trials, ${formatShare(count / answer.trials)} of all` })),
    table: { columns: ['from (ns)', 'to (ns)', 'trials'], rows: bins.map(({ from, to, count }) => [from, to, count]) },
  }
}

/** Share that has not crossed yet against time, with its 95 % band, the percentiles as points and the noiseless crossing. */
export function survivalFigure(answer: SwitchingAnswer, stem: string, kind: 'linear' | 'log'): FigureModel {
  const { time, value, low, high } = answer.survival
  const x = time.map(ns)
  const floor = logFloor(value, low, answer.trials)
  const known = answer.time.percentiles.flatMap(({ share, value, low, high }) => value === null ? [] : [{ share, at: ns(value), low: ns(low ?? value), high: ns(high ?? value) }])
  const points: ErrorPoint[] = known.map(p => ({ x: p.at, y: 1 - p.share, xLow: p.low, xHigh: p.high }))
  const named = known.filter(p => kind === 'log' ? p.share >= 0.5 : p.share >= 0.1 && p.share <= 0.9)
  const end = x[x.length - 1] ?? 1
  const labels: Label[] = named.map(p => ({ x: p.low > end * 0.3 ? p.low : p.high, y: 1 - p.share, text: `${Number((p.share * 100).toPrecision(4))} % by ${p.at.toPrecision(3)} ns`, tone: 'ink', ...(p.low > end * 0.3 ? { anchor: 'end', dx: -9, dy: 16 } as const : { dx: 9, dy: -7 }) }))
  const left = value[value.length - 1] ?? 1
  return {
    name: `${stem}-survival`,
    title: 'How many have not crossed yet',
    summary: `After ${Number(end.toPrecision(3))} ns ${left === 0 ? `none of ${formatCount(answer.trials)} trials is` : `${formatShare(left)} of the trials are`} left that never crossed; band: 95 %, pointwise.`,
    x: { label: 'time since the leading half amplitude', unit: 'ns', kind: 'linear', domain: [0, end] },
    y: { label: 'share not crossed', unit: '', kind, domain: kind === 'log' ? [floor, 1] : [0, 1] },
    layers: [
      { kind: 'band', x, low, high, tone: 'near' },
      { kind: 'line', x, y: kind === 'log' ? value.map(v => v > 0 ? v : Number.NaN) : value, tone: 'near', width: 2 },
      { kind: 'points', points, tone: 'ink' },
    ],
    marks: timeMarks(answer, 0).map(mark => besideLabels(mark, end, kind)),
    labels,
    readings: x.map((t, k) => ({ x: t, y: value[k]!, text: `at ${t.toFixed(3)} ns ${formatShare(value[k]!)} have not crossed (95 %: ${formatShare(low[k]!)} to ${formatShare(high[k]!)})` })),
    table: { columns: ['time (ns)', 'share not crossed', '95 % low', '95 % high'], rows: x.map((t, k) => [t, value[k]!, low[k]!, high[k]!]) },
  }
}

/**
 * The noiseless crossing falls near the median, whose words stand near the curve too: its own go between the heights of those
 * words, before the line, where the curve is high, or after it where the axis leaves no room before.
 */
function besideLabels(mark: Mark, end: number, kind: 'linear' | 'log'): Mark {
  if (mark.at > end * 0.3) return { ...mark, before: true, level: kind === 'linear' ? 0.28 : 0.03 }
  return { ...mark, before: false, level: kind === 'linear' ? 0.7 : 0.2 }
}

/** Start of the logarithmic axis: the decade below the smallest bound that is drawn, but not far below what so many trials can tell. */
function logFloor(value: readonly number[], low: readonly number[], trials: number): number {
  const smallest = Math.min(...value.filter(v => v > 0), ...low.filter(v => v > 0), 0.5)
  return Number(`1e${Math.floor(Math.log10(Math.max(smallest, 0.3 / trials)))}`)
}

/** Of two marks the earlier one has its words before it, unless it is too close to the axis for them. */
function apartMarks(marks: readonly Mark[], end: number): Mark[] {
  const [first, second] = marks
  if (!first || !second) return [...marks]
  const early = first.at <= second.at ? first : second
  return marks.map(mark => mark === early && mark.at > 0.35 * end ? { ...mark, before: true } : mark)
}
