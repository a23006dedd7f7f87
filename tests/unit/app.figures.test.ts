import { describe, expect, it } from 'vitest'
import { mergeChunks, openChunk, planJob } from '#shared/physics/engine'
import type { MotionAnswer, SwitchingAnswer } from '#shared/schemas/answer'
import { jobSpecSchema } from '#shared/schemas/job'
import { ensembleFigure, SIGHTS } from '~/utils/figure/ensemble'
import { linePath, nearest, scaleOf, thin, ticksOf } from '~/utils/figure/geometry'
import { momentFigure, pathTimes } from '~/utils/figure/motion'
import { shareStrip } from '~/utils/figure/shares'
import { distributionFigure, survivalFigure } from '~/utils/figure/switching'
import { cellText, tableCsv } from '~/utils/figure/table'
import { reducedSpec, WORKED_SET } from '../support/specs'

function solve(spec: Parameters<typeof openChunk>[0]) {
  const run = openChunk(spec, 0, planJob(spec).trials)
  while (run.done < run.total) run.advance()
  return mergeChunks(spec, [run.finish()])
}

const switching = solve(reducedSpec({ stability: 40, drive: 2, width: 5, trials: 400 })).answer as SwitchingAnswer
const hopeless = solve(reducedSpec({ stability: 40, drive: 0.2, width: 0.5, trials: 40 })).answer as SwitchingAnswer

describe('all trials over time', () => {
  it.each(SIGHTS)('%s: a band around the median, in the unit of its axis, and nothing for an answer from before', (sight) => {
    const figure = ensembleFigure(switching, 'job', sight)!
    const [low, high] = figure.y.domain
    expect(figure.table.rows).toHaveLength(switching.ensemble!.time.length)
    for (const [, five, median, ninetyFive] of figure.table.rows) {
      expect(five!).toBeLessThanOrEqual(median!)
      expect(median!).toBeLessThanOrEqual(ninetyFive!)
      expect(five!).toBeGreaterThanOrEqual(low)
      expect(ninetyFive!).toBeLessThanOrEqual(high)
    }
    expect(figure.summary).toContain('A write draws')
    expect(ensembleFigure({ ...switching, ensemble: undefined }, 'job', sight)).toBeNull()
  })
})

describe('distribution of switching times', () => {
  const figure = distributionFigure(switching, 'job')!

  it('shows every trial that crossed once', () => {
    const shown = figure.table.rows.reduce((sum, row) => sum + row[2]!, 0)
    expect(shown).toBe(switching.time.crossed)
    expect(figure.readings).toHaveLength(switching.histogram.counts.length)
  })

  it('marks mean and noiseless crossing in the unit of the axis, within it', () => {
    expect(figure.marks.map(mark => mark.at)).toEqual([switching.time.mean!.value * 1e9, switching.deterministic.crossing! * 1e9])
    for (const mark of figure.marks) expect(mark.at).toBeLessThan(figure.x.domain[1])
  })

  it('is absent when no trial crossed', () => {
    expect(hopeless.time.crossed).toBe(0)
    expect(distributionFigure(hopeless, 'job')).toBeNull()
  })
})

describe('survival curve', () => {
  it.each(['linear', 'log'] as const)('keeps the words of the noiseless crossing off those of the percentiles, also where both fall together: %s', (kind) => {
    const height = kind === 'linear' ? (y: number) => y : (y: number) => Math.log10(y) / -Math.log10(1 / switching.trials)
    for (const share of [0.15, 0.5, 0.8]) {
      const end = switching.survival.time.at(-1)!
      const { marks: [mark], labels } = survivalFigure({ ...switching, deterministic: { ...switching.deterministic, crossing: share * end } }, 'job', kind)
      for (const label of labels) {
        const sameSide = mark!.before === (label.anchor === 'end')
        if (sameSide) expect(Math.abs(height(mark!.level!) - height(label.y)), `${label.text} at ${share}`).toBeGreaterThan(0.08)
      }
    }
  })

  it('falls from one and keeps the band round it', () => {
    const { table } = survivalFigure(switching, 'job', 'linear')
    expect(table.rows[0]![1]).toBe(1)
    for (const [k, [, value, low, high]] of table.rows.entries()) {
      expect(low!).toBeLessThanOrEqual(value! + 1e-12)
      expect(high!).toBeGreaterThanOrEqual(value! - 1e-12)
      if (k > 0) expect(value!).toBeLessThanOrEqual(table.rows[k - 1]![1]!)
    }
  })

  it('breaks off on a logarithmic axis where nothing is left, and starts the axis within a decade of what can be told', () => {
    const figure = survivalFigure(switching, 'job', 'log')
    const line = figure.layers.find(layer => layer.kind === 'line')!
    expect(line.kind === 'line' && Array.from(line.y).every(y => Number.isNaN(y) || y > 0)).toBe(true)
    expect(figure.y.domain[0]).toBeGreaterThanOrEqual(1e-4)
    expect(figure.y.domain[0]).toBeLessThanOrEqual(Math.min(...switching.survival.value.filter(v => v > 0)))
  })

  it('puts each known percentile on the curve', () => {
    const points = survivalFigure(switching, 'job', 'linear').layers.find(layer => layer.kind === 'points')!
    const known = switching.time.percentiles.filter(p => p.value !== null)
    expect(points.kind === 'points' && points.points.map(p => p.y)).toEqual(known.map(p => 1 - p.share))
  })

  it('tells of a pulse that switches nothing', () => {
    expect(survivalFigure(hopeless, 'job', 'log').summary).toContain('100')
  })
})

describe('moment against time', () => {
  const spec = jobSpecSchema.parse({ ...WORKED_SET, question: { kind: 'motion', paths: 3, after: 1e-9 } })
  const { answer, paths } = solve(spec)
  const motion = answer as MotionAnswer

  it('draws one thin line a path, the mean and the noiseless path', () => {
    const figure = momentFigure(motion, paths, 'z', 'job', spec.write.width)
    expect(figure.layers).toHaveLength(5)
    const first = figure.layers[0]!
    expect(first.kind === 'line' && first.y[7]).toBe(paths[7 * 3 + 2])
    const second = figure.layers[1]!
    expect(second.kind === 'line' && second.y[0]).toBe(paths[motion.paths.samples * 3 + 2])
  })

  it('picks the component asked for', () => {
    const x = momentFigure(motion, paths, 'x', 'job', spec.write.width).layers[2]!
    expect(x.kind === 'line' && x.y[5]).toBe(paths[(2 * motion.paths.samples + 5) * 3])
  })

  it('draws mean and noiseless path before the paths have arrived', () => {
    expect(momentFigure(motion, null, 'z', 'job', spec.write.width).layers).toHaveLength(2)
  })

  it('times its samples from the layout', () => {
    const times = pathTimes({ paths: 1, samples: 3, start: -1e-10, interval: 2e-10 })
    expect([...times]).toEqual([-1e-10 * 1e9, (-1e-10 + 2e-10) * 1e9, (-1e-10 + 4e-10) * 1e9])
  })
})

describe('geometry', () => {
  const log = { label: 'share', unit: '', kind: 'log', domain: [1e-4, 1] } as const

  it('keeps what lies below a logarithmic axis on its start', () => {
    const scale = scaleOf(log, [100, 0])
    expect(scale(1)).toBe(0)
    expect(scale(1e-2)).toBeCloseTo(50)
    expect(scale(0)).toBe(100)
    expect(scale.invert(50)).toBeCloseTo(1e-2)
  })

  it('ticks powers of ten, fewer where there is less room', () => {
    const scale = scaleOf(log, [100, 0])
    expect(ticksOf(log, scale, 6).map(tick => tick.exponent ?? tick.text)).toEqual(['1', '\u22121', '\u22122', '\u22123', '\u22124'])
    expect(ticksOf(log, scale, 3)).toHaveLength(3)
  })

  it('thins to the extremes of each column', () => {
    const x = Float64Array.from({ length: 10_000 }, (_, k) => k)
    const y = x.map(k => k === 4321 ? 9 : k === 7654 ? -9 : Math.sin(k))
    const kept = thin(x, y, 50)
    expect(kept.length).toBeLessThanOrEqual(200)
    expect(kept).toContain(4321)
    expect(kept).toContain(7654)
    expect(kept).toContain(0)
    expect(kept).toContain(9999)
    expect(kept.every((k, at) => at === 0 || k > kept[at - 1]!)).toBe(true)
  })

  it('leaves a gap where a value is not a number', () => {
    const axis = { label: '', unit: '', kind: 'linear', domain: [0, 3] } as const
    const scale = scaleOf(axis, [0, 3])
    expect(linePath([0, 1, 2, 3], [0, 1, Number.NaN, 3], scale, scale, 100)).toBe('M0,0L1,1M3,3Z')
  })

  it('finds the closest reading', () => {
    expect(nearest([{ x: 0 }, { x: 1 }, { x: 4 }], 2.4)).toBe(1)
    expect(nearest([{ x: 0 }, { x: 1 }, { x: 4 }], 99)).toBe(2)
  })
})

describe('strip of shares', () => {
  const share = (count: number, value: number, low: number, high: number) => ({ count, of: 1000, value, low, high })

  it('gives a share that was never seen a bound and no point', () => {
    const { bars, ticks } = shareStrip([share(0, 0, 0, 3.7e-3), share(20, 0.02, 0.012, 0.031)])
    expect(bars[0]!.value).toBeNull()
    expect(bars[0]!.high).toBeLessThan(bars[1]!.low)
    expect(bars[1]!.low).toBeLessThan(bars[1]!.value!)
    expect(bars[1]!.value!).toBeLessThan(bars[1]!.high)
    expect(ticks[0]!.text).toBe('1')
  })
})

describe('table of a figure', () => {
  it('writes RFC 4180 with full numbers', () => {
    expect(tableCsv({ columns: ['time (ns)', 'say "x", y'], rows: [[0.1, null], [-1e-9, 2]] })).toBe('time (ns),"say ""x"", y"\r\n0.1,\r\n-1e-9,2\r\n')
  })

  it('shortens numbers for reading only', () => {
    expect(cellText(0.123456789)).toBe('0.12346')
    expect(cellText(-3)).toBe('\u22123')
    expect(cellText(1.5e-7)).toBe('1.500e\u22127')
    expect(cellText(null)).toBe('–')
  })
})
