import { mergeChunks, openChunk, planJob, priceJob } from '#shared/physics/engine'
import type { JobSpec, JobSpecInput } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { measurePrice } from '../../workers/calibration'
import { WORKED_SET } from '../support/specs'

export const name = 'price: predicted CPU-seconds against those used'

const job = (changes: { device?: object, write?: object, start?: object, environment?: object }): JobSpecInput => ({
  ...WORKED_SET, question: { kind: 'switching', trials: 10 }, ...(changes.start ? { start: changes.start } : {}),
  device: { ...WORKED_SET.device, ...changes.device }, environment: { temperature: 300, ...changes.environment }, write: { ...WORKED_SET.write, ...changes.write },
} as JobSpecInput)

const SET: [string, JobSpecInput][] = [
  ['the worked cell', job({})],
  ['low damping', job({ device: { damping: 0.003 } })],
  ['high damping, short', job({ device: { damping: 0.1 }, write: { drive: { kind: 'current', current: 600e-6 }, width: 2e-9 } })],
  ['a drive just above the critical one', job({ write: { drive: { kind: 'current', current: 35e-6 } } })],
  ['a symmetric junction', job({ device: { torque: { kind: 'symmetric', polarization: 0.6 } } })],
  ['a tilted reference', job({ device: { referenceTilt: 0.1, fieldLikeRatio: 0.2 } })],
  ['an access transistor', job({ write: { drive: { kind: 'voltage', voltage: 0.5 }, seriesResistance: 1000, currentLimit: 1e-4, edge: 1e-9 } })],
  ['a train with long edges', job({ write: { width: 3e-9, edge: 2e-9, waveform: { kind: 'train', pulses: 3, period: 6e-9 } } })],
  ['an easy axis in the film', job({ device: { anisotropy: { kind: 'inPlane', interfaceAnisotropy: 0 }, diameter: 100e-9, secondDiameter: 40e-9, thickness: 2e-9 }, write: { drive: { kind: 'current', current: 1e-3 } } })],
  ['thermalised', job({ start: { kind: 'thermalised', duration: 10e-9 } })],
]
const WANTED_SECONDS = 1.5

export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const rows: { metric: string, value: number, unit: string }[] = []
  let worst = 0
  for (const [label, input] of SET) {
    // Other work on the machine changes what a step costs: the price is taken before and after.
    const first = measurePrice()
    const draft = jobSpecSchema.parse(input)
    const trials = Math.max(10, Math.min(1_000_000, Math.round(WANTED_SECONDS / (planJob(draft).stepsPerTrial * first))))
    const spec: JobSpec = { ...draft, question: { kind: 'switching', trials, failureRule: 'afterSettling' } }
    const before = process.cpuUsage()
    const chunk = openChunk(spec, 0, trials)
    while (chunk.done < chunk.total) chunk.advance()
    mergeChunks(spec, [chunk.finish()])
    const { user, system } = process.cpuUsage(before)
    const perStep = (first + measurePrice()) / 2
    const ratio = priceJob(spec, perStep) / ((user + system) / 1e6)
    worst = Math.max(worst, Math.abs(Math.log(ratio)))
    rows.push({ metric: `predicted over used: ${label}`, value: ratio, unit: '×' })
  }
  rows.push({ metric: 'farthest from 1', value: Math.expm1(worst) * 100, unit: '%' })
  return rows
}
