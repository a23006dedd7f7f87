import type { z } from 'zod'
import { anisotropySchema, deviceSchema, driveSchema, environmentSchema, questionSchema, startSchema, stepSchema, torqueSchema, waveformSchema, writeSchema, type Device, type JobSpec } from '#shared/schemas/job'
import { DIMENSIONS, quantityMeta } from '#shared/schemas/quantities'
import { formatCount } from '#shared/utils/format'
import { findUnit, formatPlain, formatSi } from '#shared/utils/quantity'
import { DIRECTION_WORDS, QUESTION_WORDS, RULE_WORDS } from '#shared/utils/sentence'

/** One line of a specification: as typed, and in coherent SI where that says more. */
export interface SpecRow { label: string, symbol?: string, text: string, si?: string }
export interface SpecSection { title: string, rows: SpecRow[] }

const TORQUE_WORDS = { constant: 'constant', symmetric: 'symmetric junction at fixed current', asymmetric: 'asymmetric (Slonczewski)' } as const
const DRIVE_WORDS = { current: 'current', currentDensity: 'current density', voltage: 'voltage' } as const
const WAVEFORM_WORDS = { train: 'train of pulses', bipolar: 'bipolar pair', points: 'from points' } as const
const START_WORDS = { fixedAngle: 'at a fixed angle', thermalised: 'thermalised' } as const
const ANISOTROPY_WORDS = { effectiveField: 'one effective field', interface: 'interface, shape subtracted', inPlane: 'easy axis in the film' } as const

/** The quantity fields among `schemas`, in their order, with the values of `values`. */
function quantities(schemas: Readonly<Record<string, z.ZodType>>, values: object): SpecRow[] {
  const byName = new Map<string, unknown>(Object.entries(values))
  return Object.entries(schemas).flatMap(([name, schema]) => {
    const value = byName.get(name)
    if (typeof value !== 'number') return []
    const { label, symbol, dimension, unit } = quantityMeta(schema)
    // "28 nm" says its SI value itself; "340 mT" and "85 °C" don't.
    const tellsSi = value === 0 || findUnit(dimension, unit).label.endsWith(DIMENSIONS[dimension].si)
    return [{ label, ...(symbol ? { symbol } : {}), text: formatPlain(value, dimension, unit), ...(tellsSi ? {} : { si: formatSi(value, dimension) }) }]
  })
}

/** Fields of the variant of a discriminated union that `kind` names. */
function variant(options: readonly { shape: Readonly<Record<string, z.ZodType>> & { kind: z.ZodLiteral } }[], kind: string): Record<string, z.ZodType> {
  const { kind: _, ...fields } = options.find(option => option.shape.kind.value === kind)!.shape
  return fields
}

/** Every number of a cell. */
export function deviceSections({ anisotropy, torque, label, strayField, ...plainDevice }: Device): SpecSection[] {
  const { damping, saturationMagnetization, thickness, diameter, secondDiameter, uniaxialField, exchangeStiffness, strayField: stray, ...junction } = deviceSchema.shape
  return [
    {
      title: 'Free layer',
      rows: [
        { label: 'Name', text: label },
        ...quantities({ damping, saturationMagnetization }, plainDevice),
        { label: 'Anisotropy given as', text: ANISOTROPY_WORDS[anisotropy.kind] },
        ...quantities(variant(anisotropySchema.options, anisotropy.kind), anisotropy),
        ...quantities({ thickness, diameter, secondDiameter, uniaxialField, exchangeStiffness }, plainDevice),
        ...(plainDevice.shape === 'ellipsoid' ? [{ label: 'Shape factors of', text: 'ellipsoid' }] : []),
        ...quantities(stray.unwrap().shape, strayField ?? {}),
      ],
    },
    {
      title: 'Junction',
      rows: [
        { label: 'Torque', text: TORQUE_WORDS[torque.kind] },
        ...quantities(variant(torqueSchema.options, torque.kind), torque),
        ...quantities(junction, plainDevice),
      ],
    },
  ]
}

/** The few numbers by which a cell is told from another. */
export function keyNumbers(device: Device): SpecRow[] {
  const { damping, saturationMagnetization, thickness, diameter, resistanceArea, tunnelMagnetoresistance } = deviceSchema.shape
  return [
    ...quantities({ diameter, thickness, damping, saturationMagnetization }, device),
    ...quantities(variant(anisotropySchema.options, device.anisotropy.kind), device.anisotropy),
    ...quantities({ resistanceArea, tunnelMagnetoresistance }, device),
  ]
}

/** Everything a job says, section by section, in the units people use. Labels and units come from the schema. */
export function specSections({ question, device, environment, write, start, numerics }: JobSpec): SpecSection[] {
  return [
    {
      title: 'Question',
      rows: [
        { label: 'Asked', text: QUESTION_WORDS[question.kind] },
        ...(question.kind === 'switching'
          ? [{ label: 'Trials', text: formatCount(question.trials) }, { label: 'Failure counted', text: RULE_WORDS[question.failureRule] }]
          : question.kind === 'failure'
            ? [
                ...quantities({ shortest: questionSchema.options[2].shape.shortest, target: questionSchema.options[2].shape.target }, question),
                { label: 'Widths with trials', text: formatCount(question.widths) }, { label: 'Trials at each', text: formatCount(question.trials) }, { label: 'Failure counted', text: RULE_WORDS[question.failureRule] },
              ]
            : [{ label: 'Paths with noise', text: formatCount(question.paths) }, ...quantities({ after: questionSchema.options[0].shape.after }, question)]),
      ],
    },
    ...deviceSections(device),
    {
      title: 'Write pulse',
      rows: [
        { label: 'Direction', text: DIRECTION_WORDS[write.direction] },
        { label: 'Driven by', text: DRIVE_WORDS[write.drive.kind] },
        ...quantities(variant(driveSchema.options, write.drive.kind), write.drive),
        ...quantities(writeSchema.shape, write),
        ...(write.waveform
          ? [
              { label: 'Waveform', text: WAVEFORM_WORDS[write.waveform.kind] },
              ...(write.waveform.kind === 'train' ? [{ label: 'Pulses', text: formatCount(write.waveform.pulses) }] : []),
              ...(write.waveform.kind === 'points' ? [{ label: 'Points', text: formatCount(write.waveform.time.length) }] : []),
              ...quantities(variant(waveformSchema.options, write.waveform.kind), write.waveform),
            ]
          : []),
        ...(start ? [{ label: 'Trials start', text: START_WORDS[start.kind] }, ...quantities(variant(startSchema.options, start.kind), start)] : []),
      ],
    },
    {
      title: 'Surroundings',
      rows: [
        ...quantities(environmentSchema.shape, environment),
        ...quantities(environmentSchema.shape.appliedField.unwrap().shape, environment.appliedField),
      ],
    },
    {
      title: 'Numerics',
      rows: [
        { label: 'Seed', text: String(numerics.seed) },
        { label: 'Step', text: numerics.step.kind === 'automatic' ? 'set by the bias allowed' : 'fixed' },
        ...quantities(variant(stepSchema.options, numerics.step.kind), numerics.step),
      ],
    },
  ]
}
