import type { JobSpec } from '../schemas/job'
import { formatNumber } from '../utils/format'
import { formatPlain, formatPrefixed, formatQuantity } from '../utils/quantity'
import { BOLTZMANN, ELEMENTARY_CHARGE, REDUCED_PLANCK, VACUUM_PERMEABILITY } from './constants'
import type { Problem } from './problem'
import { nearSide, prepareProblem, torqueForm } from './problem'

export interface DerivedNumber {
  id: DerivedId
  label: string
  symbol: string
  /** SI, or a pure number */
  value: number
  /** value with its unit as shown */
  text: string
  formula: string
}

export type DerivedId = 'stability' | 'anisotropyField' | 'anisotropyEnergy' | 'criticalCurrentToFar' | 'criticalCurrentToNear' | 'criticalDensity'
  | 'reducedDrive' | 'reducedField' | 'reducedWidth' | 'current' | 'currentDensity' | 'voltage' | 'energy' | 'parallelResistance' | 'antiparallelResistance'
  | 'efficiency' | 'tauUnit' | 'precession' | 'startAngle' | 'crossoverDiameter' | 'wallBarrier'

export interface Derived {
  numbers: DerivedNumber[]
  get: (id: DerivedId) => DerivedNumber
  /** what limits these numbers, each in its own words */
  cautions: string[]
}

/**
 * J_c0 = (2e/ħ)(α/η) μ0 Ms t H_k (A/m²) with η at the state that the write leaves; I_c0 = J_c0 · area.
 * @param cosine m·p of that state, +1 parallel
 */
export function criticalDensity(spec: JobSpec, anisotropyField: number, cosine: number): number {
  const { device } = spec
  const form = torqueForm(device.torque)
  const efficiency = form.q0 / (form.q1 + form.q2 * cosine)
  return 2 * ELEMENTARY_CHARGE / REDUCED_PLANCK * device.damping / efficiency * VACUUM_PERMEABILITY * device.saturationMagnetization * device.thickness * anisotropyField
}

/** The numbers shown with every job. @throws PhysicsError as `prepareProblem` */
export function deriveNumbers(spec: JobSpec, problem: Problem = prepareProblem(spec)): Derived {
  const { environment, write } = spec
  const n = problem.numbers
  const side = nearSide(spec)
  const startResistance = side === 1 ? n.parallelResistance : n.antiparallelResistance
  const toFar = criticalDensity(spec, n.anisotropyField, side)
  const toNear = criticalDensity(spec, n.anisotropyField, -side)
  const current = write.drive.kind === 'current' ? write.drive.current
    : write.drive.kind === 'currentDensity' ? write.drive.currentDensity * n.area
      : write.drive.voltage / startResistance
  const voltage = write.drive.kind === 'voltage' ? write.drive.voltage : current * startResistance
  const energy = current * voltage * (write.width - write.edge / 3)
  const { crossoverDiameter, wallBarrier } = wallNumbers(spec, problem)
  const [far, near] = side === 1 ? ['antiparallel', 'parallel'] : ['parallel', 'antiparallel']
  const numbers: DerivedNumber[] = [
    { id: 'stability', label: `Stability at ${formatPlain(environment.temperature, 'temperature', '°C')}`, symbol: 'Δ', value: n.stability, text: formatNumber(n.stability), formula: 'Δ = K_eff V/(k_B T) = ½ μ0 Ms H_k V/(k_B T)' },
    { id: 'criticalCurrentToFar', label: `Critical current to ${far}`, symbol: 'I_c0', value: toFar * n.area, text: formatPrefixed(toFar * n.area, 'A'), formula: `I_c0 = (4e/ħ)(α/η) Δ k_B T, η at the ${near} state` },
    { id: 'criticalCurrentToNear', label: `Critical current to ${near}`, symbol: 'I_c0', value: toNear * n.area, text: formatPrefixed(toNear * n.area, 'A'), formula: `I_c0 = (4e/ħ)(α/η) Δ k_B T, η at the ${far} state` },
    { id: 'criticalDensity', label: `Critical density to ${far}`, symbol: 'J_c0', value: toFar, text: formatQuantity(toFar, 'currentDensity', 'MA/cm2'), formula: 'J_c0 = (2e/ħ)(α/η) μ0 Ms t H_k' },
    { id: 'reducedDrive', label: 'Reduced drive', symbol: 'i', value: problem.reducedDrive, text: formatNumber(problem.reducedDrive), formula: 'i = a_J/(α H_k) = J/J_c0 at the start' },
    { id: 'voltage', label: `Voltage, ${near} state`, symbol: 'V', value: voltage, text: formatPrefixed(voltage, 'V'), formula: 'V = J · RA, RA of the state at the start' },
    { id: 'current', label: `Current, ${near} state`, symbol: 'I', value: current, text: formatPrefixed(current, 'A'), formula: 'I = J · area = V/R' },
    { id: 'currentDensity', label: 'Current density', symbol: 'J', value: current / n.area, text: formatQuantity(current / n.area, 'currentDensity', 'MA/cm2'), formula: 'J = I/(π d²/4)' },
    { id: 'energy', label: 'Write energy', symbol: 'E', value: energy, text: formatPrefixed(energy, 'J'), formula: 'E = ∫ V I dt = V I (t_p − t_e/3), at the resistance of the start' },
    { id: 'reducedWidth', label: 'Reduced width', symbol: 'τ', value: problem.tauRate * write.width, text: formatNumber(problem.tauRate * write.width), formula: 'τ = α γ0 H_k t_p/(1 + α²)' },
    { id: 'tauUnit', label: 'Unit of reduced time', symbol: 't_1', value: 1 / problem.tauRate, text: formatPrefixed(1 / problem.tauRate, 's'), formula: 't_1 = (1 + α²)/(α γ0 H_k)' },
    { id: 'reducedField', label: 'Reduced field along z', symbol: 'h', value: environment.appliedField.z / n.anisotropyField, text: formatNumber(environment.appliedField.z / n.anisotropyField), formula: 'h = H_z/H_k' },
    { id: 'anisotropyField', label: 'Effective anisotropy field', symbol: 'μ0 H_k', value: n.anisotropyField, text: formatQuantity(n.anisotropyField, 'field', 'mT'), formula: 'μ0 H_k = 2 K_eff/Ms' },
    { id: 'anisotropyEnergy', label: 'Effective anisotropy', symbol: 'K_eff', value: n.anisotropyEnergy, text: `${formatNumber(n.anisotropyEnergy)} J/m³`, formula: 'K_eff = K_i/t − ½ μ0 Ms² (N_zz − N_xx)' },
    { id: 'efficiency', label: 'Efficiency', symbol: 'Δ/I_c0', value: n.stability / (toFar * n.area), text: `${formatNumber(n.stability / (toFar * n.area) * 1e-6)} /µA`, formula: 'Δ/I_c0' },
    { id: 'parallelResistance', label: 'Resistance, parallel', symbol: 'R_P', value: n.parallelResistance, text: formatPrefixed(n.parallelResistance, 'Ω'), formula: 'R_P = RA/(π d²/4)' },
    { id: 'antiparallelResistance', label: 'Resistance, antiparallel', symbol: 'R_AP', value: n.antiparallelResistance, text: formatPrefixed(n.antiparallelResistance, 'Ω'), formula: 'R_AP = R_P (1 + TMR)' },
    { id: 'precession', label: 'Precession at rest', symbol: 'f', value: restFrequency(problem), text: formatPrefixed(restFrequency(problem), 'Hz'), formula: 'f = γ0 (H_k + H_z)/(2π (1 + α²))' },
    { id: 'startAngle', label: 'Start of the noiseless path', symbol: 'θ_0', value: problem.rmsAngle, text: formatQuantity(problem.rmsAngle, 'angle', '°', 3), formula: 'rms angle of the zero-drive Boltzmann well' },
    { id: 'crossoverDiameter', label: 'Coherent up to', symbol: 'd_c', value: crossoverDiameter, text: formatPrefixed(crossoverDiameter, 'm'), formula: 'd_c = (16/π) √(A/K_eff)' },
    { id: 'wallBarrier', label: 'Wall barrier', symbol: 'Δ_wall', value: wallBarrier, text: formatNumber(wallBarrier), formula: 'Δ_wall = 4 √(A K_eff) d t/(k_B T)' },
  ]
  const byId = new Map(numbers.map(number => [number.id, number]))
  return { numbers, get: id => byId.get(id)!, cautions: cautions(spec, problem) }
}

const restFrequency = (problem: Problem) => problem.rate * Math.abs(1 + problem.side * problem.dynamics.field[2]) / (2 * Math.PI)

/** Diameter above which a wall costs less than turning as one, and the barrier of that wall in kB T. */
export function wallNumbers(spec: JobSpec, problem: Problem): { crossoverDiameter: number, wallBarrier: number } {
  const { device, environment } = spec
  const energy = problem.numbers.anisotropyEnergy
  return {
    crossoverDiameter: 16 / Math.PI * Math.sqrt(device.exchangeStiffness / energy),
    wallBarrier: 4 * Math.sqrt(device.exchangeStiffness * energy) * device.diameter * device.thickness / (BOLTZMANN * environment.temperature),
  }
}

/** What limits the numbers of this job, each in words of its own. */
export function cautions(spec: JobSpec, problem: Problem): string[] {
  const { device, environment, write } = spec
  const { crossoverDiameter, wallBarrier } = wallNumbers(spec, problem)
  const diameter = formatPrefixed(device.diameter, 'm', 3)
  const list: string[] = []
  if (device.diameter > crossoverDiameter) {
    list.push(`At ${diameter} a wall (barrier ${formatNumber(wallBarrier, 3)}) costs less than turning as one (${formatNumber(problem.numbers.stability, 3)}): above ${formatPrefixed(crossoverDiameter, 'm', 3)} walls or nuclei carry the reversal, and this single moment is only a guide.`)
  }
  else {
    list.push(`One moment is assumed. At ${diameter} turning as one (barrier ${formatNumber(problem.numbers.stability, 3)}) costs less than a wall (${formatNumber(wallBarrier, 3)}); edges and defects may still start a nucleus. Confirm by measurement before a margin depends on it.`)
  }
  if (problem.numbers.stability < 10) list.push(`With Δ = ${formatNumber(problem.numbers.stability, 3)} the states blur into one another: the cell flips by itself within about a pulse’s time scale, and a “write” is not well defined.`)
  if (problem.reducedDrive < 1 && problem.reducedDrive > 0) list.push(`The drive is below the critical one (i = ${formatNumber(problem.reducedDrive, 3)}): only heat takes the moment over, and times spread over many decades.`)
  if (environment.temperature !== 298.15) list.push(`Material values are used as given at ${formatQuantity(environment.temperature, 'temperature', '°C', 3)}; damping, magnetization and anisotropy usually fall or rise on the way from room temperature.`)
  if (write.drive.kind === 'voltage') {
    const tmr = device.tunnelMagnetoresistance
    const fromTmr = Math.sqrt(tmr / (2 + tmr))
    const used = device.torque.kind === 'constant' ? device.torque.efficiency : device.torque.polarization
    if (Math.abs(used * used - tmr / (2 + tmr)) > 0.1 * (tmr / (2 + tmr))) list.push(`The torque’s polarization (${formatNumber(used, 3)}) and the TMR (which asks for ${formatNumber(fromTmr, 3)}) disagree: P² should be TMR/(2 + TMR).`)
    list.push('TMR is taken constant in voltage; barrier wear and breakdown are not predicted.')
  }
  return list
}
