import type { SwitchingAnswer } from '#shared/schemas/answer'
import { formatPrefixed } from '#shared/utils/quantity'
import type { FigureModel } from './model'

export const SIGHTS = ['m along the easy axis', 'resistance'] as const
export type Sight = typeof SIGHTS[number]

const NANO = 1e9

/** All trials over time: median, mean, and the band that holds 90 % of them. Null where the answer is from before this was kept. */
export function ensembleFigure(answer: SwitchingAnswer, stem: string, sight: Sight): FigureModel | null {
  const { ensemble, energy } = answer
  if (!ensemble) return null
  const resistance = sight === 'resistance'
  const band = resistance ? ensemble.resistance : ensemble.moment
  const scale = resistance ? 1e-3 : 1
  const [low, median, high, mean] = [band.low, band.median, band.high, band.mean].map(values => values.map(value => value * scale)) as [number[], number[], number[], number[]]
  const time = ensemble.time.map(t => t * NANO)
  const [least, most] = [Math.min(...low), Math.max(...high)]
  const unit = resistance ? 'kΩ' : ''
  const read = (value: number) => `${value.toFixed(resistance ? 3 : 2).replace('-', '\u2212')}${unit && ` ${unit}`}`
  return {
    name: `${stem}-${resistance ? 'resistance' : 'moment'}`,
    title: resistance ? 'Resistance of all trials' : 'The moment of all trials',
    summary: `Median (thick), mean (dashed) and the band that holds 90 % of the trials at each time.${energy ? ` A write draws ${formatPrefixed(energy.value, 'J', 4)} on average (95 %: ${formatPrefixed(energy.low, 'J', 4)} to ${formatPrefixed(energy.high, 'J', 4)}).` : ''}`,
    x: { label: 'time since the leading half amplitude', unit: 'ns', kind: 'linear', domain: [Math.min(0, time[0] ?? 0), time[time.length - 1] ?? 1] },
    y: resistance
      ? { label: 'resistance', unit, kind: 'linear', domain: [Math.max(0, least - 0.08 * (most - least)), most + 0.08 * (most - least)] }
      : { label: 'm along the easy axis', unit, kind: 'linear', domain: [-1, 1] },
    layers: [
      { kind: 'band', x: time, low, high, tone: 'near' },
      { kind: 'line', x: time, y: mean, tone: 'ink', dash: 'dashed', width: 1.4 },
      { kind: 'line', x: time, y: median, tone: 'near', width: 2 },
    ],
    marks: [],
    labels: [],
    readings: time.map((t, k) => ({ x: t, y: median[k]!, text: `at ${t.toFixed(3)} ns median ${read(median[k]!)}, 90 % between ${read(low[k]!)} and ${read(high[k]!)}` })),
    table: {
      columns: ['time (ns)', ...['5 %', 'median', '95 %', 'mean'].map(name => resistance ? `${name} (kΩ)` : name)],
      rows: time.map((t, k) => [t, low[k]!, median[k]!, high[k]!, mean[k]!]),
    },
  }
}
