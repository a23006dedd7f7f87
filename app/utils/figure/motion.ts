import type { MotionAnswer, PathsLayout } from '#shared/schemas/answer'
import type { FigureModel, Layer, Mark } from './model'

export const COMPONENTS = ['z', 'x', 'y'] as const
export type Component = typeof COMPONENTS[number]

const NANO = 1e9
const OFFSET: Record<Component, number> = { x: 0, y: 1, z: 2 }

/** Every third number from `offset` on, for one component of x, y, z triples. */
const pick = (triples: ArrayLike<number>, offset: number, first = 0, samples = triples.length / 3): Float64Array =>
  Float64Array.from({ length: samples }, (_, k) => triples[(first + k) * 3 + offset]!)

/** Times of the samples of the kept paths, in ns. */
export const pathTimes = ({ start, interval, samples }: PathsLayout): Float64Array => Float64Array.from({ length: samples }, (_, k) => (start + k * interval) * NANO)

/** One component of the moment against time: the paths with noise, their mean, and the path without noise. */
export function momentFigure(answer: MotionAnswer, paths: Float32Array | null, component: Component, stem: string, pulseEnd: number): FigureModel {
  const offset = OFFSET[component]
  const time = pathTimes(answer.paths)
  const { samples } = answer.paths
  const count = paths ? Math.floor(paths.length / (samples * 3)) : 0
  const noisy: Layer[] = Array.from({ length: count }, (_, p) => ({ kind: 'line', x: time, y: pick(paths!, offset, p * samples, samples), tone: 'near', width: 0.8, opacity: count > 4 ? 0.35 : 0.7 }))
  const meanTime = answer.mean.time.map(t => t * NANO)
  const mean = pick(answer.mean.m, offset)
  const quietTime = answer.deterministic.time.map(t => t * NANO)
  const quiet = pick(answer.deterministic.m, offset)
  const end = Math.max(time[time.length - 1] ?? 0, quietTime[quietTime.length - 1] ?? 0)
  const marks: Mark[] = pulseEnd * NANO < end * 0.995 ? [{ axis: 'x', at: pulseEnd * NANO, tone: 'soft', text: 'pulse ends' }] : []
  return {
    name: `${stem}-m${component}`,
    title: `The moment along ${component}`,
    summary: `${count === 1 ? 'One path' : `${count} paths`} with noise (thin), their mean (thick) and the path without noise (dashed)${answer.deterministic.crossing === null ? ', which does not cross the equator' : `, which crosses the equator at ${Number((answer.deterministic.crossing * NANO).toPrecision(3))} ns`}.`,
    x: { label: 'time since the leading half amplitude', unit: 'ns', kind: 'linear', domain: [time[0] ?? 0, end] },
    y: { label: `m along ${component}`, unit: '', kind: 'linear', domain: [-1, 1] },
    layers: [
      ...noisy,
      { kind: 'line', x: quietTime, y: quiet, tone: 'far', dash: 'dashed', width: 1.6 },
      { kind: 'line', x: meanTime, y: mean, tone: 'ink', width: 2 },
    ],
    marks,
    labels: [],
    readings: meanTime.map((t, k) => ({ x: t, y: mean[k]!, text: `at ${t.toFixed(3)} ns the mean of m along ${component} is ${mean[k]!.toFixed(3).replace('-', '\u2212')}` })),
    table: { columns: ['time (ns)', `mean of m along ${component}`], rows: meanTime.map((t, k) => [t, mean[k]!]) },
  }
}
