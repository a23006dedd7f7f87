import type { Device, JobSpec, Torque } from '../schemas/job'
import type { DriveResponse } from '../numerics/macrospin'
import { STAGE, STAGE_LENGTH } from '../numerics/macrospin'
import { BOLTZMANN, ELEMENTARY_CHARGE, REDUCED_PLANCK, VACUUM_PERMEABILITY } from './constants'
import type { DeviceNumbers, Material } from './device'
import { FRAMES, materialAt, toSolver } from './device'
import { PhysicsError } from './errors'

/** η(θ) = q0/(q1 + q2 cos θ), cos θ = m·p: constant, symmetric junction at fixed current, or Slonczewski's asymmetric form. */
export function torqueForm(torque: Torque): { q0: number, q1: number, q2: number } {
  if (torque.kind === 'constant') return { q0: torque.efficiency, q1: 1, q2: 0 }
  if (torque.kind === 'symmetric') return { q0: torque.polarization, q1: 1, q2: torque.polarization ** 2 }
  const square = torque.asymmetry ** 2
  return { q0: torque.polarization * square, q1: (square + 1) / 2, q2: (square - 1) / 2 }
}

/** The coefficient of the torque under a voltage: it does not depend on the angle (Slonczewski & Sun, JMMM 310, 169 (2007), from memory). */
export const voltagePolarization = (torque: Torque) => torque.kind === 'constant' ? torque.efficiency : torque.polarization

/** +1 where the write starts parallel (along +e, the easy axis), −1 where it starts antiparallel. */
export const nearSide = (spec: JobSpec): 1 | -1 => spec.write.direction === 'parallelToAntiparallel' ? 1 : -1

/** ħ/(2 e μ0 Ms t): a_J in A/m of an efficiency of one and 1 A/m². */
export const torquePerDensity = (saturationMagnetization: number, thickness: number) =>
  REDUCED_PLANCK / (2 * ELEMENTARY_CHARGE * VACUUM_PERMEABILITY * saturationMagnetization * thickness)

/** The junction under a drive with the moment across the reference layer (cos θ = 0), where every quantity of it is taken that has one value. */
interface Working {
  /** ½(G_P + G_AP) and ½(G_P − G_AP) at this voltage and temperature, S: G = mean + half · cos θ */
  mean: number
  half: number
  /** across the junction at the mean conductance, V; signed */
  voltage: number
  temperature: number
  material: Material
}

/** The electrical side of a write. All signed quantities are positive towards parallel. */
export class Junction {
  private readonly sign: number
  constructor(private readonly spec: JobSpec, private readonly numbers: DeviceNumbers) {
    this.sign = -nearSide(spec)
  }

  private get series(): number {
    return this.spec.write.seriesResistance ?? 0
  }

  /** Signed amplitude of the source: V under a voltage, A otherwise. */
  source(drive: number): number {
    const { write } = this.spec
    const amplitude = write.drive.kind === 'voltage' ? write.drive.voltage : write.drive.kind === 'current' ? write.drive.current : write.drive.currentDensity * this.numbers.area
    return this.sign * drive * amplitude
  }

  /** The working point by fixed-point iteration: TMR falls with the voltage and the temperature, which follow from it. */
  working(drive: number): Working {
    const { spec: { device, environment, write }, numbers } = this
    const source = this.source(drive)
    const heats = (device.thermalResistance ?? 0) > 0
    let material = heats ? null : materialAt(device, numbers.factors, environment.temperature)
    let [voltage, temperature, mean, half] = [0, environment.temperature, 0, 0]
    for (let n = 0; n < 60; n++) {
      const before = voltage
      if (heats) material = materialAt(device, numbers.factors, temperature)
      const tmr = material!.tunnelMagnetoresistance / (1 + (device.halfVoltage === undefined ? 0 : (voltage / device.halfVoltage) ** 2))
      const [parallel, antiparallel] = [1 / numbers.parallelResistance, 1 / (numbers.parallelResistance * (1 + tmr))]
      mean = (parallel + antiparallel) / 2
      half = (parallel - antiparallel) / 2
      voltage = write.drive.kind === 'voltage' ? source / (1 + this.series * mean) : source / mean
      const limit = (write.currentLimit ?? Infinity) / mean
      if (write.drive.kind === 'voltage' && Math.abs(voltage) > limit) voltage = Math.sign(voltage) * limit
      const hotter = environment.temperature + (device.thermalResistance ?? 0) * voltage * voltage * mean
      const moved = Math.abs(hotter - temperature)
      temperature = hotter
      if (Math.abs(voltage - before) <= 1e-13 * Math.abs(voltage) && moved <= 1e-11 * hotter) break
    }
    return { mean, half, voltage, temperature, material: material! }
  }

  /** Voltage across the junction, current through it and power drawn from the source, at cos θ. The moving current of a voltage drive. */
  at(drive: number, cosine: number, { mean, half }: Pick<Working, 'mean' | 'half'> = this.working(drive)): { voltage: number, current: number, power: number } {
    const { write } = this.spec
    const conductance = mean + half * cosine
    const source = this.source(drive)
    if (write.drive.kind !== 'voltage') return { voltage: source / conductance, current: source, power: source * source * (1 / conductance + this.series) }
    const current = Math.sign(source) * Math.min(Math.abs(source) / (1 / conductance + this.series), write.currentLimit ?? Infinity)
    return { voltage: current / conductance, current, power: current * source }
  }

  /** Power drawn from the source at a drive, W, as a function of cos θ. */
  powerOf(drive: number): (cosine: number) => number {
    const working = this.working(drive)
    return cosine => this.at(drive, cosine, working).power
  }
}

/** Whether the drive does more than exert a torque in proportion to it. */
const answersOtherwise = ({ device, write }: JobSpec) =>
  (device.fieldLikeQuadratic ?? 0) !== 0 || (device.voltageAnisotropy ?? 0) !== 0 || (device.thermalResistance ?? 0) > 0
  || (write.drive.kind === 'voltage' && ((write.seriesResistance ?? 0) > 0 || write.currentLimit !== undefined || device.halfVoltage !== undefined))

/**
 * a_J at full amplitude without its angle dependence, A/m, with its sign: positive pulls towards +p, so that a write to
 * parallel is positive. a_J(θ) = amplitude · q0/(q1 + q2 cos θ) with the returned form.
 */
export function torqueAmplitude(spec: JobSpec, numbers: DeviceNumbers): { amplitude: number, form: { q0: number, q1: number, q2: number } } {
  const { device, write } = spec
  const sign = -nearSide(spec)
  const perDensity = torquePerDensity(numbers.saturationMagnetization, device.thickness)
  if (write.drive.kind === 'voltage') {
    const meanConductance = (1 / numbers.parallelResistance + 1 / numbers.antiparallelResistance) / 2
    return { amplitude: sign * perDensity * write.drive.voltage * meanConductance / numbers.area, form: { q0: voltagePolarization(device.torque), q1: 1, q2: 0 } }
  }
  const density = write.drive.kind === 'current' ? write.drive.current / numbers.area : write.drive.currentDensity
  return { amplitude: sign * perDensity * density, form: torqueForm(device.torque) }
}

/**
 * How the reduced equation changes with the drive; undefined where the torque is all. The voltage's share of a junction in series with R_s
 * is V/(1 + R_s G(θ)), and at the limit I_max/G(θ): both are of the form q0/(q1 + q2 cos θ), and the smaller of the two acts.
 * Anisotropy, quadratic field-like torque, heating and TMR(V) follow the voltage at the mean conductance.
 * @param scale field scale H_s, A/m
 */
export function driveResponse(spec: JobSpec, numbers: DeviceNumbers, scale: number): DriveResponse | undefined {
  if (!answersOtherwise(spec)) return undefined
  const { device, write } = spec
  const junction = new Junction(spec, numbers)
  const form = torqueForm(device.torque)
  const noisePerKelvin = (ms: number) => 2 * device.damping * BOLTZMANN / (VACUUM_PERMEABILITY * ms * numbers.volume * scale * (1 + device.damping ** 2))
  const normal = FRAMES[numbers.easyAxis].indexOf(2)
  // A drive that stays is worked out once.
  const last = new Float64Array(STAGE_LENGTH)
  let lastDrive = NaN
  return (drive, row) => {
    if (drive !== lastDrive) work(drive, last)
    lastDrive = drive
    row.set(last)
  }

  function work(drive: number, row: Float64Array): void {
    const { mean, half, voltage, temperature, material } = junction.working(drive)
    const ms = material.saturationMagnetization
    const source = junction.source(drive)
    const perAmpere = torquePerDensity(ms, device.thickness) / (numbers.area * scale)
    row[STAGE.r1] = row[STAGE.r2] = 0
    if (write.drive.kind === 'voltage') {
      const series = write.seriesResistance ?? 0
      row[STAGE.a] = perAmpere * voltagePolarization(device.torque) * source * mean
      row[STAGE.q1] = 1 + series * mean
      row[STAGE.q2] = series * half
      if (write.currentLimit !== undefined) {
        row[STAGE.r1] = Math.abs(source) * mean / write.currentLimit
        row[STAGE.r2] = Math.abs(source) * half / write.currentLimit
      }
    }
    else {
      row[STAGE.a] = perAmpere * form.q0 * source
      row[STAGE.q1] = form.q1
      row[STAGE.q2] = form.q2
    }
    row[STAGE.c] = (device.fieldLikeQuadratic ?? 0) * voltage * voltage / scale
    const along = toSolver(numbers.easyAxis, material.diagonal)
    for (let k = 0; k < 3; k++) row[STAGE.x + k] = along[k]! / scale
    row[STAGE.x + normal]! += voltageField(device, voltage, ms) / scale
    row[STAGE.noise] = noisePerKelvin(ms) * temperature
  }
}

/** Change of the perpendicular anisotropy field under a voltage, A/m: 2ΔK_i/(μ0 Ms t) with ΔK_i = −ξ V/t_b. */
function voltageField(device: Device, voltage: number, ms: number): number {
  if (!device.voltageAnisotropy) return 0
  if (device.barrierThickness === undefined) throw new PhysicsError(['device', 'barrierThickness'], 'Voltage-controlled anisotropy needs the thickness of the barrier.')
  return -2 * device.voltageAnisotropy * voltage / (device.barrierThickness * VACUUM_PERMEABILITY * ms * device.thickness)
}
