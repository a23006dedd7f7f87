import type { JobSpec, Torque } from '../schemas/job'
import { LIMITS } from '../schemas/job'
import type { Dynamics, Segment } from '../numerics/macrospin'
import type { Landscape } from '../numerics/boltzmann'
import { findWell, rmsAngle } from '../numerics/boltzmann'
import { longestStep } from '../numerics/stepRule'
import { BOLTZMANN, ELEMENTARY_CHARGE, GAMMA_0, REDUCED_PLANCK, VACUUM_PERMEABILITY } from './constants'
import { PhysicsError } from './errors'
import { cylinderAxialFactor } from './shape'

/** η(θ) = q0/(q1 + q2 cos θ), cos θ = m·p: constant, symmetric junction at fixed current, or Slonczewski's asymmetric form. */
export function torqueForm(torque: Torque): { q0: number, q1: number, q2: number } {
  if (torque.kind === 'constant') return { q0: torque.efficiency, q1: 1, q2: 0 }
  if (torque.kind === 'symmetric') return { q0: torque.polarization, q1: 1, q2: torque.polarization ** 2 }
  const square = torque.asymmetry ** 2
  return { q0: torque.polarization * square, q1: (square + 1) / 2, q2: (square - 1) / 2 }
}

/** The coefficient of the torque under a voltage: it does not depend on the angle (Slonczewski & Sun, JMMM 310, 169 (2007), from memory). */
const voltagePolarization = (torque: Torque) => torque.kind === 'constant' ? torque.efficiency : torque.polarization

/** Sizes of the free layer and its junction. All SI; `anisotropyField` is effective, shape included. */
export interface DeviceNumbers {
  area: number
  volume: number
  anisotropyField: number
  /** K_eff, J/m³ */
  anisotropyEnergy: number
  /** Δ = K_eff V/(kB T) */
  stability: number
  /** Nzz − Nxx of the circular cylinder */
  shapeDifference: number
  parallelResistance: number
  antiparallelResistance: number
}

/**
 * @throws PhysicsError where shape beats the interface anisotropy: the easy axis lies in the film.
 */
export function deviceNumbers(spec: JobSpec): DeviceNumbers {
  const { device, environment } = spec
  const area = Math.PI * device.diameter ** 2 / 4
  const volume = area * device.thickness
  const nz = cylinderAxialFactor(device.thickness, device.diameter)
  const shapeDifference = (3 * nz - 1) / 2
  const ms = device.saturationMagnetization
  const anisotropyField = device.anisotropy.kind === 'effectiveField'
    ? device.anisotropy.anisotropyField
    : 2 * device.anisotropy.interfaceAnisotropy / (VACUUM_PERMEABILITY * ms * device.thickness) - ms * shapeDifference
  if (!(anisotropyField > 0)) {
    const needed = 0.5 * VACUUM_PERMEABILITY * ms * ms * device.thickness * shapeDifference
    throw new PhysicsError(['device', 'anisotropy', 'interfaceAnisotropy'], `The easy axis lies in the film: shape outweighs the interface below ${(needed * 1e3).toPrecision(3)} mJ/m² for this layer.`)
  }
  const anisotropyEnergy = VACUUM_PERMEABILITY * ms * anisotropyField / 2
  const parallelResistance = device.resistanceArea / area
  return {
    area, volume, anisotropyField, anisotropyEnergy, shapeDifference,
    stability: anisotropyEnergy * volume / (BOLTZMANN * environment.temperature),
    parallelResistance,
    antiparallelResistance: parallelResistance * (1 + device.tunnelMagnetoresistance),
  }
}

/** +1 where the write starts parallel (+z), −1 where it starts antiparallel. */
export const nearSide = (spec: JobSpec): 1 | -1 => spec.write.direction === 'parallelToAntiparallel' ? 1 : -1

/**
 * a_J at full amplitude without its angle dependence, A/m, with its sign: positive pulls towards +p, so that a write to
 * parallel is positive. a_J(θ) = amplitude · q0/(q1 + q2 cos θ) with the returned form.
 */
export function torqueAmplitude(spec: JobSpec, numbers: DeviceNumbers): { amplitude: number, form: { q0: number, q1: number, q2: number } } {
  const { device, write } = spec
  const sign = -nearSide(spec)
  const perDensity = REDUCED_PLANCK / (2 * ELEMENTARY_CHARGE * VACUUM_PERMEABILITY * device.saturationMagnetization * device.thickness)
  if (write.drive.kind === 'voltage') {
    const meanConductance = (1 / numbers.parallelResistance + 1 / numbers.antiparallelResistance) / 2
    return { amplitude: sign * perDensity * write.drive.voltage * meanConductance / numbers.area, form: { q0: voltagePolarization(device.torque), q1: 1, q2: 0 } }
  }
  const density = write.drive.kind === 'current' ? write.drive.current / numbers.area : write.drive.currentDensity
  return { amplitude: sign * perDensity * density, form: torqueForm(device.torque) }
}

/** The job in the reduced units of `shared/numerics`, with what is needed to come back to seconds. */
export interface Problem {
  numbers: DeviceNumbers
  dynamics: Dynamics
  landscape: Landscape
  /** reduced time s = rate · t, rate = γ0 H_k/(1+α²) in s⁻¹ */
  rate: number
  side: 1 | -1
  /** minima at zero drive */
  nearWell: [number, number, number]
  farWell: [number, number, number]
  /** τ of one second: α γ0 H_k/(1+α²) */
  tauRate: number
  /** a_J/(α H_k) at the near pole, the reduced drive i */
  reducedDrive: number
  /** longest step allowed, s */
  step: number
  /** ω Δt at the largest precession frequency ω, rad/s */
  largestFrequency: number
  stepFrom: 'bias' | 'phase' | 'fixed'
  /** the pulse in reduced time, from the start of the rise to the end of the fall */
  pulse: Segment[]
  rmsAngle: number
}

/** @throws PhysicsError where the numbers describe no bistable device or too many steps */
export function prepareProblem(spec: JobSpec): Problem {
  const numbers = deviceNumbers(spec)
  const { device, environment, write } = spec
  const alpha = device.damping
  const scale = numbers.anisotropyField
  const rate = GAMMA_0 * scale / (1 + alpha * alpha)
  const { x, y, z } = environment.appliedField
  const field: [number, number, number] = [x / scale, y / scale, z / scale]
  const landscape: Landscape = { stability: numbers.stability, diagonal: [0, 0, 1], field }
  const side = nearSide(spec)
  const names = side === 1 ? ['parallel', 'antiparallel'] : ['antiparallel', 'parallel']
  const nearWell = findWell(landscape, side)
  const farWell = findWell(landscape, side === 1 ? -1 : 1)
  const missing = nearWell === null ? names[0] : farWell === null ? names[1] : null
  if (nearWell === null || farWell === null) throw new PhysicsError(['environment', 'appliedField'], `At rest in this field there is no ${missing} state: the field is beyond the cell’s switching field.`)

  const { amplitude, form } = torqueAmplitude(spec, numbers)
  const reference: [number, number, number] = [Math.sin(device.referenceTilt), 0, Math.cos(device.referenceTilt)]
  const dynamics: Dynamics = {
    damping: alpha,
    diagonal: [0, 0, 1],
    field,
    reference,
    torque: { q0: amplitude * form.q0 / scale, q1: form.q1, q2: form.q2 },
    fieldLikeRatio: device.fieldLikeRatio,
    noise: alpha / (numbers.stability * (1 + alpha * alpha)),
  }
  const nearCosine = side * reference[2]
  const driveAt = (cosine: number) => Math.abs(dynamics.torque.q0 / (form.q1 + form.q2 * cosine))
  const reducedDrive = driveAt(nearCosine) / alpha
  const largestDrive = Math.max(driveAt(1), driveAt(-1))
  const largestField = 1 + Math.sqrt(field[0] ** 2 + field[1] ** 2 + field[2] ** 2) + largestDrive * Math.sqrt(1 + device.fieldLikeRatio ** 2)
  const largestFrequency = rate * largestField
  const tauRate = alpha * rate
  const rule = spec.numerics.step.kind === 'fixed'
    ? null
    : longestStep(alpha, tauRate * write.width, Math.max(1, reducedDrive) - 1, spec.numerics.step.biasAllowed)
  const wanted = spec.numerics.step.kind === 'fixed' ? spec.numerics.step.step : rule!.phaseStep / largestFrequency
  const step = Math.min(wanted, write.width)
  if (step * largestFrequency > 1) throw new PhysicsError(['numerics', 'step', 'step'], `A step of ${(step * 1e12).toPrecision(3)} ps turns the moment by ${(step * largestFrequency).toFixed(1)} rad at once; choose at most ${(1e12 / largestFrequency).toPrecision(3)} ps.`)
  const pulse = pulseSegments(write.width, write.edge, step).map(s => ({ ...s, start: s.start * rate, end: s.end * rate }))
  const steps = pulse.reduce((sum, s) => sum + s.steps, 0)
  if (steps > LIMITS.stepsPerTrial) throw new PhysicsError(['write', 'width'], `The pulse takes ${steps.toLocaleString('en')} steps of ${(step * 1e12).toPrecision(3)} ps a trial; at most ${LIMITS.stepsPerTrial.toLocaleString('en')} are done. Shorten the pulse or allow a longer step.`)
  return {
    numbers, dynamics, landscape, rate, side, nearWell, farWell, tauRate, reducedDrive, step, largestFrequency,
    stepFrom: rule?.from ?? 'fixed', pulse, rmsAngle: rmsAngle(landscape, nearWell),
  }
}

/**
 * The trapezoid as linear pieces of equal steps no longer than `step`, in seconds. Time 0 is the leading half amplitude; the width runs
 * from half amplitude to half amplitude, so the rise starts at −edge/2 and the fall ends at width + edge/2.
 */
export function pulseSegments(width: number, edge: number, step: number): Segment[] {
  const piece = (start: number, end: number, from: number, to: number): Segment =>
    ({ start, end, from, to, steps: Math.max(1, Math.ceil((end - start) / step * (1 - 1e-12))) })
  const segments = edge > 0 ? [piece(-edge / 2, edge / 2, 0, 1)] : []
  if (width > edge) segments.push(piece(edge / 2, width - edge / 2, 1, 1))
  if (edge > 0) segments.push(piece(width - edge / 2, width + edge / 2, 1, 0))
  return segments
}
