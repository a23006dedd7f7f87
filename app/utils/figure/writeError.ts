import type { WriteErrorCurve } from '#shared/physics/writeError'
import { formatShare } from '#shared/utils/format'
import type { FigureModel, Mark } from './model'

const NANO = 1e9
const FLOOR = 1e-13

/** Write error against pulse width on a logarithmic axis, with the width that is asked for and, where it is on the curve, the one for a target. */
export function writeErrorFigure(curve: WriteErrorCurve, asked: { width: number, error: number }, target: { error: number, width: number | null }, name: string): FigureModel {
  const x = curve.width.map(width => width * NANO)
  const marks: Mark[] = [{ axis: 'x', at: asked.width * NANO, tone: 'far', text: `${Number((asked.width * NANO).toPrecision(4))} ns`, row: 0 }]
  if (target.width !== null) marks.push({ axis: 'y', at: target.error, tone: 'soft', text: '' })
  const last = x[x.length - 1] ?? 1
  return {
    name,
    title: 'How often the write fails',
    summary: `Solved without sampling (Fokker–Planck): ${formatShare(asked.error)} of writes fail at ${Number((asked.width * NANO).toPrecision(4))} ns.`,
    x: { label: 'pulse width', unit: 'ns', kind: 'linear', domain: [0, last] },
    y: { label: 'write error', unit: '', kind: 'log', domain: [Math.max(FLOOR, Math.min(1e-4, ...curve.value.filter(v => v > FLOOR))), 1] },
    layers: [{ kind: 'line', x, y: curve.value.map(v => v >= FLOOR ? v : Number.NaN), tone: 'near', width: 2 }],
    marks,
    labels: [],
    readings: x.map((width, k) => ({ x: width, y: Math.max(FLOOR, curve.value[k]!), text: `${width.toPrecision(4)} ns: ${curve.value[k]! > 0 ? formatShare(curve.value[k]!) : 'below 10⁻¹⁵'}` })),
    table: { columns: ['pulse width (ns)', 'write error'], rows: x.map((width, k) => [width, curve.value[k]!]) },
  }
}
