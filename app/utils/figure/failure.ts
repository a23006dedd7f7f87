import type { FailureAnswer } from '#shared/schemas/answer'
import { formatCount, formatShare } from '#shared/utils/format'
import type { ErrorPoint, FigureModel, Layer, Mark, Reading } from './model'

const NANO = 1e9
/** Smallest error that the logarithmic axis shows. */
const FLOOR = 1e-13

const ns = (t: number) => t * NANO
const nsWords = (t: number) => `${ns(t).toPrecision(4)} ns`

/**
 * Write error against pulse width: the solution as a line, its closed form dotted, the trials as points with their exact 95 % intervals;
 * of widths without a failure only the upper bound is drawn.
 */
export function failureFigure(answer: FailureAnswer, stem: string): FigureModel {
  const { checks, solution, failureRule, target, needed } = answer
  const counted = checks.map(({ width, failures }) => ({ width, ...failures[failureRule] }))
  const lowest = solution.kind === 'solved' ? Math.min(...solution.value.filter(value => value >= FLOOR)) : Math.min(target, ...counted.map(c => c.count > 0 ? c.low : c.high))
  const floor = Math.max(FLOOR, 10 ** Math.floor(Math.log10(Math.min(0.1, lowest))))
  const last = Math.max(...counted.map(c => c.width), solution.kind === 'solved' ? solution.width.at(-1)! : 0, needed && needed.width < 5 * Math.max(...counted.map(c => c.width)) ? needed.width : 0)
  const points: ErrorPoint[] = counted.map(({ width, count, value, low, high }) => ({ x: ns(width), y: count > 0 ? value : high, yLow: count > 0 ? Math.max(floor, low) : floor, yHigh: high, ...(count > 0 ? {} : { bound: true as const }) }))
  const above = (values: readonly number[]) => values.map(value => value >= floor ? value : Number.NaN)
  const layers: Layer[] = [
    ...(solution.kind === 'solved' && solution.closedForm ? [{ kind: 'line', x: solution.width.map(ns), y: above(solution.closedForm), tone: 'soft', dash: 'dotted', width: 1.5 } as const] : []),
    ...(solution.kind === 'solved' ? [{ kind: 'line', x: solution.width.map(ns), y: above(solution.value), tone: 'near', width: 2 } as const] : []),
    { kind: 'points', points, tone: 'ink' },
  ]
  const marks: Mark[] = [
    ...(target >= floor ? [{ axis: 'y', at: target, tone: 'soft', text: `target ${formatShare(target, 1)}` } as const] : []),
    ...(needed && needed.width <= last ? [{ axis: 'x', at: ns(needed.width), tone: 'far', text: `${nsWords(needed.width)}${needed.from === 'extrapolation' ? ', extrapolated' : ''}`, row: 0 } as const] : []),
  ]
  const solvedReadings: Reading[] = solution.kind === 'solved'
    ? solution.width.map((width, k) => ({ x: ns(width), y: Math.max(floor, solution.value[k]!), text: `${nsWords(width)}: ${solution.value[k]! > 0 ? formatShare(solution.value[k]!) : 'below 10⁻¹⁵'}, solved` }))
    : []
  const countedReadings: Reading[] = counted.map(({ width, count, of, value, low, high }) => ({
    x: ns(width), y: Math.max(floor, count > 0 ? value : high),
    text: `${nsWords(width)}: ${formatCount(count)} of ${formatCount(of)} failed, ${count > 0 ? `${formatShare(value)} (95 %: ${formatShare(low)} to ${formatShare(high)})` : `below ${formatShare(high)} at 95 %`}`,
  }))
  return {
    name: `${stem}-write-error`,
    title: 'Write error against pulse width',
    summary: [
      solution.kind === 'solved' ? 'Line: solved without sampling' : '', solution.kind === 'solved' && solution.closedForm ? 'dotted: linearised closed form, right in its slope only' : '', `points: trials with 95 % intervals${counted.some(c => c.count === 0) ? ', bars: at most, where none failed' : ''}`,
    ].filter(Boolean).join('; ').replace(/^./, c => c.toUpperCase()) + '.',
    x: { label: 'pulse width', unit: 'ns', kind: 'linear', domain: [0, ns(last)] },
    y: { label: 'write error', unit: '', kind: 'log', domain: [floor, 1] },
    layers,
    marks,
    labels: [],
    readings: [...solvedReadings, ...countedReadings].sort((a, b) => a.x - b.x),
    table: {
      columns: ['pulse width (ns)', 'solved', 'counted', '95 % low', '95 % high', 'trials'],
      rows: [
        ...counted.map(({ width, value, low, high, of }, k) => [ns(width), checks[k]!.solved?.value ?? null, value, low, high, of]),
        ...(solution.kind === 'solved' ? solution.width.map((width, k) => [ns(width), solution.value[k]!, null, null, null, null]) : []),
      ].sort((a, b) => a[0]! - b[0]!),
    },
  }
}
