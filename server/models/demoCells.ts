import { deviceSchema, jobSpecSchema } from '#shared/schemas/job'
import type { Device, JobSpec } from '#shared/schemas/job'
import { fromUnit } from '#shared/utils/quantity'

const milliTesla = (value: number) => fromUnit(value, 'field', 'mT')
const nm = (value: number) => fromUnit(value, 'length', 'nm')
const ns = (value: number) => fromUnit(value, 'time', 'ns')
const degrees = (value: number) => fromUnit(value, 'angle', '°')
const celsius = (value: number) => fromUnit(value, 'temperature', '°C')

const reference = deviceSchema.parse({
  label: 'Q-28',
  damping: 0.008,
  saturationMagnetization: 1.05e6,
  anisotropy: { kind: 'effectiveField', anisotropyField: milliTesla(340) },
  thickness: nm(1.4),
  diameter: nm(28),
  exchangeStiffness: 18e-12,
  torque: { kind: 'constant', efficiency: 0.55 },
  resistanceArea: 6e-12,
  tunnelMagnetoresistance: 1.4,
})

const cell = (label: string, changes: Partial<Device>): Device => deviceSchema.parse({ ...reference, label, ...changes })

/** Invented cells of the demo team. */
export const DEMO_CELLS: readonly { device: Device, note: string }[] = [
  { device: reference, note: 'The team’s reference cell: one effective anisotropy field, constant torque efficiency.' },
  {
    device: cell('M-45', {
      damping: 0.012, saturationMagnetization: 0.98e6, anisotropy: { kind: 'effectiveField', anisotropyField: milliTesla(215) },
      thickness: nm(1.6), diameter: nm(45), resistanceArea: 9e-12, tunnelMagnetoresistance: 1.6,
    }),
    note: 'Larger than one domain allows: see what the page says of walls.',
  },
  {
    device: cell('V-24', {
      damping: 0.0035, saturationMagnetization: 0.9e6, anisotropy: { kind: 'effectiveField', anisotropyField: milliTesla(460) },
      thickness: nm(1.7), diameter: nm(24), resistanceArea: 5e-12,
    }),
    note: 'Low damping: a small critical current and many turns before it crosses.',
  },
  {
    device: cell('K-32', {
      saturationMagnetization: 1.15e6, anisotropy: { kind: 'interface', interfaceAnisotropy: 1.22e-3 },
      thickness: nm(1.3), diameter: nm(32), tunnelMagnetoresistance: 1.5,
    }),
    note: 'Described by its interface anisotropy; the shape of the cylinder is subtracted.',
  },
  {
    device: cell('S-30', {
      damping: 0.006, torque: { kind: 'symmetric', polarization: 0.64 }, diameter: nm(30),
      anisotropy: { kind: 'effectiveField', anisotropyField: milliTesla(310) }, tunnelMagnetoresistance: 1.39,
    }),
    note: 'Symmetric junction at fixed current: the two directions differ.',
  },
  {
    device: cell('T-28', { referenceTilt: degrees(6), fieldLikeRatio: 0.1 }),
    note: 'Reference layer tilted by 6° and some field-like torque.',
  },
]

const named = (label: string): Device => {
  const found = DEMO_CELLS.find(({ device }) => device.label === label)
  if (!found) throw new Error(`There is no demo cell ${label}.`)
  return found.device
}

const warm = { temperature: celsius(85) }

/** What the demo team asks at first start. `by`: which of its people, by e-mail address. */
export const DEMO_JOBS: readonly { by: string, key: string, spec: JobSpec }[] = [
  {
    by: 'colleague@example.org',
    key: 'demo-tilted-reference',
    spec: jobSpecSchema.parse({
      question: { kind: 'switching', trials: 5000 },
      device: named('T-28'),
      environment: warm,
      write: { direction: 'antiparallelToParallel', drive: { kind: 'voltage', voltage: 0.5 }, width: ns(6), edge: ns(0.2) },
      numerics: { seed: 20261 },
    }),
  },
  {
    by: 'colleague@example.org',
    key: 'demo-low-damping-paths',
    spec: jobSpecSchema.parse({
      question: { kind: 'motion', paths: 24, after: ns(2) },
      device: named('V-24'),
      environment: { temperature: celsius(25) },
      write: { direction: 'parallelToAntiparallel', drive: { kind: 'current', current: 20e-6 }, width: ns(8), edge: ns(0.3) },
      numerics: { seed: 7 },
    }),
  },
  {
    by: 'researcher@example.org',
    key: 'demo-interface-switching',
    spec: jobSpecSchema.parse({
      question: { kind: 'switching', trials: 8000, failureRule: 'atPulseEnd' },
      device: named('K-32'),
      environment: { temperature: celsius(25) },
      write: { direction: 'parallelToAntiparallel', drive: { kind: 'currentDensity', currentDensity: 8e10 }, width: ns(5), edge: ns(0.3) },
      numerics: { seed: 11 },
    }),
  },
  {
    by: 'researcher@example.org',
    key: 'demo-write-error',
    spec: jobSpecSchema.parse({
      question: { kind: 'failure', shortest: ns(2), widths: 6, trials: 4000 },
      device: named('Q-28'),
      environment: warm,
      write: { direction: 'parallelToAntiparallel', drive: { kind: 'current', current: 40e-6 }, width: ns(8), edge: ns(0.3) },
      numerics: { seed: 20261 },
    }),
  },
  {
    by: 'researcher@example.org',
    key: 'demo-reference-switching',
    spec: jobSpecSchema.parse({
      question: { kind: 'switching', trials: 20_000 },
      device: named('Q-28'),
      environment: warm,
      write: { direction: 'parallelToAntiparallel', drive: { kind: 'current', current: 32e-6 }, width: ns(5), edge: ns(0.3) },
      numerics: { seed: 20261 },
    }),
  },
]
