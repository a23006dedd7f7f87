import type { JobSpec } from '../schemas/job'
import { LIMITS } from '../schemas/job'
import type { Dynamics, Segment } from '../numerics/macrospin'
import { responseOf, STAGE, STAGE_LENGTH } from '../numerics/macrospin'
import type { Landscape } from '../numerics/boltzmann'
import { findWell, rmsAngle } from '../numerics/boltzmann'
import { longestStep } from '../numerics/stepRule'
import { GAMMA_0 } from './constants'
import type { DeviceNumbers, EasyAxis } from './device'
import { deviceNumbers, toSolver } from './device'
import { driveResponse, Junction, nearSide, torqueAmplitude } from './drive'
import { PhysicsError } from './errors'
import { cutIntoSteps, drivenTime, waveformPieces } from './waveform'

export { deviceNumbers } from './device'
export type { DeviceNumbers } from './device'
export { nearSide, torqueAmplitude, torqueForm } from './drive'
export { pulseSegments } from './waveform'

/**
 * The job in the reduced units of `shared/numerics`, with what is needed to come back to seconds. Vectors are in the solver's frame, whose z
 * is the easy axis; see `toFilm`.
 */
export interface Problem {
  numbers: DeviceNumbers
  dynamics: Dynamics
  landscape: Landscape
  /** reduced time s = rate · t, rate = γ0 H_k/(1+α²) in s⁻¹ */
  rate: number
  side: 1 | -1
  easyAxis: EasyAxis
  /** minima at zero drive */
  nearWell: [number, number, number]
  farWell: [number, number, number]
  /** τ of one second: α γ0 H/(1+α²) with H the mean stiffness, which is H_k where both directions are alike */
  tauRate: number
  /** field that the critical drive has to overcome, A/m: the mean stiffness, with the field along x where the easy axis lies in the film */
  criticalField: number
  /** a_J/(α H) at the near pole, the reduced drive i */
  reducedDrive: number
  /** reduced stiffness of the two directions across the easy axis at zero field: 1 and 1 for an axial cell */
  stiffnesses: [number, number]
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
  const stray = device.strayField
  const along = toSolver(numbers.easyAxis, [x + (stray?.x ?? 0), y + (stray?.y ?? 0), z + (stray?.z ?? 0)])
  const field: [number, number, number] = [along[0] / scale, along[1] / scale, along[2] / scale]
  const diagonal: [number, number, number] = [0, numbers.diagonal[1] / scale, numbers.diagonal[2] / scale]
  const landscape: Landscape = { stability: numbers.stability, diagonal, field }
  const side = nearSide(spec)
  const names = side === 1 ? ['parallel', 'antiparallel'] : ['antiparallel', 'parallel']
  const nearWell = findWell(landscape, side)
  const farWell = findWell(landscape, side === 1 ? -1 : 1)
  const missing = nearWell === null ? names[0] : farWell === null ? names[1] : null
  if (nearWell === null || farWell === null) throw new PhysicsError(['environment', 'appliedField'], `At rest in this field there is no ${missing} state: the field is beyond the cell’s switching field.`)

  const { amplitude, form } = torqueAmplitude(spec, numbers)
  const [across, onto] = [Math.sin(device.referenceTilt), Math.cos(device.referenceTilt)]
  const reference = toSolver(numbers.easyAxis, numbers.easyAxis === 'z' ? [across, 0, onto] : [onto, 0, across])
  const dynamics: Dynamics = {
    damping: alpha,
    diagonal,
    field,
    reference,
    torque: { q0: amplitude * form.q0 / scale, q1: form.q1, q2: form.q2 },
    fieldLikeRatio: device.fieldLikeRatio,
    noise: alpha / (numbers.stability * (1 + alpha * alpha)),
    response: driveResponse(spec, numbers, scale),
  }
  const pieces = waveformPieces(write)
  checkLimit(spec, numbers, pieces)
  const stiffness = numbers.stiffness / scale
  const criticalField = numbers.stiffness + (numbers.easyAxis === 'x' ? side * along[2] : 0)
  const { largestField, drive, hottest } = strongest(dynamics, pieces, side * reference[2])
  const reducedDrive = drive / alpha / (criticalField / scale)
  const largestFrequency = rate * largestField
  const tauRate = alpha * rate * stiffness
  const rule = spec.numerics.step.kind === 'fixed'
    ? null
    : longestStep(alpha, tauRate * drivenTime(write), Math.max(1, reducedDrive) - 1, spec.numerics.step.biasAllowed)
  const wanted = spec.numerics.step.kind === 'fixed' ? spec.numerics.step.step : rule!.phaseStep / largestFrequency
  const step = Math.min(wanted, write.width)
  if (step * largestFrequency > 1) throw new PhysicsError(['numerics', 'step', 'step'], `A step of ${(step * 1e12).toPrecision(3)} ps turns the moment by ${(step * largestFrequency).toFixed(1)} rad at once; choose at most ${(1e12 / largestFrequency).toPrecision(3)} ps.`)
  const kick = Math.sqrt(Math.max(dynamics.noise, hottest) * step * rate)
  if (kick > LARGEST_KICK) throw new PhysicsError(['numerics', 'step'], `Heat turns the moment by ${kick.toFixed(1)} rad in one step of ${(step * 1e12).toPrecision(3)} ps (Δ = ${numbers.stability.toPrecision(3)}): this is no state that could be written. Choose a larger cell or a fixed step of at most ${(step * 1e12 * (LARGEST_KICK / kick) ** 2).toPrecision(2)} ps.`)
  const pulse = cutIntoSteps(pieces, step).map(s => ({ ...s, start: s.start * rate, end: s.end * rate }))
  const steps = pulse.reduce((sum, s) => sum + s.steps, 0)
  if (steps > LIMITS.stepsPerTrial) throw new PhysicsError(['write', 'width'], `The pulse takes ${steps.toLocaleString('en')} steps of ${(step * 1e12).toPrecision(3)} ps a trial; at most ${LIMITS.stepsPerTrial.toLocaleString('en')} are done. Shorten the pulse or allow a longer step.`)
  const ramps = pulse.reduce((sum, s) => sum + (s.from === s.to ? 0 : s.steps), 0)
  if (ramps > LIMITS.rampSteps) throw new PhysicsError(['write', write.waveform ? 'waveform' : 'edge'], `The drive changes over ${ramps.toLocaleString('en')} steps of a trial; at most ${LIMITS.rampSteps.toLocaleString('en')} are prepared. Shorten the edges or allow a longer step.`)
  return {
    numbers, dynamics, landscape, rate, side, easyAxis: numbers.easyAxis, criticalField, stiffnesses: [diagonal[2], diagonal[2] - diagonal[1]], nearWell, farWell, tauRate, reducedDrive, step, largestFrequency,
    stepFrom: rule?.from ?? 'fixed', pulse, rmsAngle: rmsAngle(landscape, nearWell),
  }
}

/** A current that is asked for has to come through the access transistor. */
function checkLimit(spec: JobSpec, numbers: DeviceNumbers, pieces: readonly { from: number, to: number }[]): void {
  const { write } = spec
  if (write.drive.kind === 'voltage' || write.currentLimit === undefined) return
  const junction = new Junction(spec, numbers)
  const most = Math.max(...pieces.flatMap(piece => [Math.abs(junction.source(piece.from)), Math.abs(junction.source(piece.to))]))
  if (most > write.currentLimit) throw new PhysicsError(['write', 'currentLimit'], `The drive asks for ${(most * 1e6).toPrecision(4)} µA, more than this limit lets through.`)
}

/** Root mean square of the turn that the thermal field makes in one step, rad, beyond which no step resolves it. */
const LARGEST_KICK = 0.7

/** Largest rate of turning anywhere on the sphere under any part of the waveform, in H_s, and |a_J| at full amplitude at the starting pole. */
function strongest(dynamics: Dynamics, pieces: readonly { from: number, to: number }[], nearCosine: number): { largestField: number, drive: number, hottest: number } {
  const respond = responseOf(dynamics)
  const row = new Float64Array(STAGE_LENGTH)
  const torqueAt = (cosine: number) => Math.abs(row[STAGE.a]! / Math.max(row[STAGE.q1]! + row[STAGE.q2]! * cosine, row[STAGE.r1]! + row[STAGE.r2]! * cosine))
  const { field, fieldLikeRatio } = dynamics
  let [largestField, hottest] = [0, 0]
  for (const drive of new Set([1, ...pieces.flatMap(piece => [piece.from, piece.to])])) {
    respond(drive, row)
    const [dx, dy, dz] = [row[STAGE.x]!, row[STAGE.y]!, row[STAGE.z]!]
    const spread = Math.max(dx, dy, dz) - Math.min(dx, dy, dz)
    hottest = Math.max(hottest, row[STAGE.noise]!)
    const torque = Math.max(torqueAt(1), torqueAt(-1))
    largestField = Math.max(largestField, spread + Math.sqrt(field[0] ** 2 + field[1] ** 2 + field[2] ** 2) + torque * Math.sqrt(1 + fieldLikeRatio ** 2) + Math.abs(row[STAGE.c]!))
  }
  respond(1, row)
  return { largestField, hottest, drive: torqueAt(nearCosine) }
}
