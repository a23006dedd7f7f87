import type { JobSpec } from '../schemas/job'
import { formatNumber } from '../utils/format'
import { formatPlain, formatPrefixed, formatQuantity } from '../utils/quantity'
import { cautions } from './cautions'
import { ELEMENTARY_CHARGE, REDUCED_PLANCK, VACUUM_PERMEABILITY } from './constants'
import { materialAt, shapeFactors } from './device'
import { Junction } from './drive'
import type { Problem } from './problem'
import { nearSide, prepareProblem, torqueForm } from './problem'
import { failuresInTime, lossWithin, neighbourField, retention, wallNumbers, YEAR } from './retention'
import { waveformPieces } from './waveform'

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
  | 'retention' | 'tenYears' | 'failuresInTime' | 'neighbourField' | 'temperatureRise' | 'julliere' | 'outOfPlane'

export interface Derived {
  numbers: DerivedNumber[]
  get: (id: DerivedId) => DerivedNumber
  /** what limits these numbers, each in its own words */
  cautions: string[]
}

/**
 * J_c0 = (2e/ħ)(α/η) μ0 Ms t H (A/m²) with η at the state that the write leaves; I_c0 = J_c0 · area.
 * @param field H: H_k of a perpendicular cell; H + H_k + M_eff/2 where the easy axis lies in the film (Sun, Phys. Rev. B 62, 570 (2000))
 * @param cosine m·p of that state, +1 parallel
 */
export function criticalDensity(spec: JobSpec, field: number, cosine: number): number {
  const { device } = spec
  const ms = materialAt(device, shapeFactors(device), spec.environment.temperature).saturationMagnetization
  const form = torqueForm(device.torque)
  const efficiency = form.q0 / (form.q1 + form.q2 * cosine)
  return 2 * ELEMENTARY_CHARGE / REDUCED_PLANCK * device.damping / efficiency * VACUUM_PERMEABILITY * ms * device.thickness * field
}

/** The numbers shown with every job. @throws PhysicsError as `prepareProblem` */
export function deriveNumbers(spec: JobSpec, problem: Problem = prepareProblem(spec)): Derived {
  const { environment, write } = spec
  const n = problem.numbers
  const side = nearSide(spec)
  const toFar = criticalDensity(spec, problem.criticalField, side)
  const toNear = criticalDensity(spec, 2 * n.stiffness - problem.criticalField, -side)
  const junction = new Junction(spec, n)
  const { voltage, current } = absolute(junction.at(1, side))
  const energy = suppliedEnergy(spec, junction, side)
  const { crossoverDiameter, wallBarrier } = wallNumbers(spec, problem)
  const inFilm = n.easyAxis === 'x'
  const [far, near] = side === 1 ? ['antiparallel', 'parallel'] : ['parallel', 'antiparallel']
  const numbers: DerivedNumber[] = [
    { id: 'stability', label: `Stability at ${formatPlain(environment.temperature, 'temperature', '°C')}`, symbol: 'Δ', value: n.stability, text: formatNumber(n.stability), formula: inFilm ? 'Δ = ½ μ0 Ms H_k V/(k_B T)' : 'Δ = K_eff V/(k_B T) = ½ μ0 Ms H_k V/(k_B T)' },
    { id: 'criticalCurrentToFar', label: `Critical current to ${far}`, symbol: 'I_c0', value: toFar * n.area, text: formatPrefixed(toFar * n.area, 'A'), formula: inFilm ? 'I_c0 = J_c0 · area' : `I_c0 = (4e/ħ)(α/η) Δ k_B T, η at the ${near} state` },
    { id: 'criticalCurrentToNear', label: `Critical current to ${near}`, symbol: 'I_c0', value: toNear * n.area, text: formatPrefixed(toNear * n.area, 'A'), formula: inFilm ? 'I_c0 = J_c0 · area' : `I_c0 = (4e/ħ)(α/η) Δ k_B T, η at the ${far} state` },
    { id: 'criticalDensity', label: `Critical density to ${far}`, symbol: 'J_c0', value: toFar, text: formatQuantity(toFar, 'currentDensity', 'MA/cm2'), formula: inFilm ? 'J_c0 = (2e/ħ)(α/η) μ0 Ms t (H + H_k + M_eff/2)' : 'J_c0 = (2e/ħ)(α/η) μ0 Ms t H_k' },
    { id: 'reducedDrive', label: 'Reduced drive', symbol: 'i', value: problem.reducedDrive, text: formatNumber(problem.reducedDrive), formula: 'i = a_J/(α H_k) = J/J_c0 at the start' },
    { id: 'voltage', label: `Voltage, ${near} state`, symbol: 'V', value: voltage, text: formatPrefixed(voltage, 'V'), formula: 'V = J · RA, RA of the state at the start; the junction’s share' },
    { id: 'current', label: `Current, ${near} state`, symbol: 'I', value: current, text: formatPrefixed(current, 'A'), formula: 'I = J · area = V/R' },
    { id: 'currentDensity', label: 'Current density', symbol: 'J', value: current / n.area, text: formatQuantity(current / n.area, 'currentDensity', 'MA/cm2'), formula: 'J = I/area' },
    { id: 'energy', label: 'Write energy', symbol: 'E', value: energy, text: formatPrefixed(energy, 'J'), formula: spec.write.waveform ? 'E = ∫ V I dt, at the resistance of the start' : 'E = ∫ V I dt = V I (t_p − t_e/3), at the resistance of the start' },
    { id: 'reducedWidth', label: 'Reduced width', symbol: 'τ', value: problem.tauRate * write.width, text: formatNumber(problem.tauRate * write.width), formula: inFilm ? 'τ = α γ0 (H_k + M_eff/2) t_p/(1 + α²)' : 'τ = α γ0 H_k t_p/(1 + α²)' },
    { id: 'tauUnit', label: 'Unit of reduced time', symbol: 't_1', value: 1 / problem.tauRate, text: formatPrefixed(1 / problem.tauRate, 's'), formula: inFilm ? 't_1 = (1 + α²)/(α γ0 (H_k + M_eff/2))' : 't_1 = (1 + α²)/(α γ0 H_k)' },
    { id: 'reducedField', label: `Reduced field along ${n.easyAxis}`, symbol: 'h', value: problem.dynamics.field[2], text: formatNumber(problem.dynamics.field[2]), formula: `h = H_${n.easyAxis}/H_k` },
    { id: 'anisotropyField', label: 'Effective anisotropy field', symbol: 'μ0 H_k', value: n.anisotropyField, text: formatQuantity(n.anisotropyField, 'field', 'mT'), formula: 'μ0 H_k = 2 K_eff/Ms' },
    { id: 'anisotropyEnergy', label: 'Effective anisotropy', symbol: 'K_eff', value: n.anisotropyEnergy, text: `${formatNumber(n.anisotropyEnergy)} J/m³`, formula: inFilm ? 'K_eff = ½ μ0 Ms H_k, H_k = H_ku + (N_yy − N_xx) Ms' : 'K_eff = K_i/t − ½ μ0 Ms² (N_zz − N_xx)' },
    { id: 'efficiency', label: 'Efficiency', symbol: 'Δ/I_c0', value: n.stability / (toFar * n.area), text: `${formatNumber(n.stability / (toFar * n.area) * 1e-6)} /µA`, formula: 'Δ/I_c0' },
    { id: 'parallelResistance', label: 'Resistance, parallel', symbol: 'R_P', value: n.parallelResistance, text: formatPrefixed(n.parallelResistance, 'Ω'), formula: 'R_P = RA/area' },
    { id: 'antiparallelResistance', label: 'Resistance, antiparallel', symbol: 'R_AP', value: n.antiparallelResistance, text: formatPrefixed(n.antiparallelResistance, 'Ω'), formula: 'R_AP = R_P (1 + TMR)' },
    { id: 'precession', label: 'Precession at rest', symbol: 'f', value: restFrequency(problem), text: formatPrefixed(restFrequency(problem), 'Hz'), formula: n.stiffness === n.anisotropyField ? 'f = γ0 (H_k + H_z)/(2π (1 + α²))' : 'f = γ0 √(H_1 H_2)/(2π (1 + α²))' },
    { id: 'startAngle', label: 'Start of the noiseless path', symbol: 'θ_0', value: problem.rmsAngle, text: formatQuantity(problem.rmsAngle, 'angle', '°', 3), formula: 'rms angle of the zero-drive Boltzmann well' },
    { id: 'crossoverDiameter', label: 'Coherent up to', symbol: 'd_c', value: crossoverDiameter, text: formatPrefixed(crossoverDiameter, 'm'), formula: 'd_c = (16/π) √(A/K_eff)' },
    { id: 'wallBarrier', label: 'Wall barrier', symbol: 'Δ_wall', value: wallBarrier, text: formatNumber(wallBarrier), formula: 'Δ_wall = 4 √(A K_eff) d t/(k_B T)' },
    ...retentionNumbers(spec, problem),
    ...rareNumbers(spec, problem, junction),
  ]
  const byId = new Map(numbers.map(number => [number.id, number]))
  return { numbers, get: id => byId.get(id)!, cautions: cautions(spec, problem) }
}

const absolute = ({ voltage, current }: { voltage: number, current: number }) => ({ voltage: Math.abs(voltage), current: Math.abs(current) })

/** √(H_1 H_2) at the starting pole over the circle, Hz (Kittel, Phys. Rev. 73, 155 (1948), from memory). */
function restFrequency({ rate, side, dynamics, stiffnesses: [first, second] }: Problem): number {
  const along = side * dynamics.field[2]
  return rate * (first === second ? Math.abs(first + along) : Math.sqrt(Math.max(0, (first + along) * (second + along)))) / (2 * Math.PI)
}

/** ∫ V I dt over the whole waveform at the resistance of the start, J: Simpson's rule, exact where the power is quadratic in time. */
function suppliedEnergy(spec: JobSpec, junction: Junction, cosine: number): number {
  const power = (drive: number) => junction.at(drive, cosine).power
  return waveformPieces(spec.write).reduce((sum, { start, end, from, to }) => {
    if (from === to) return sum + power(from) * (end - start)
    const parts = 8
    let integral = 0
    for (let k = 0; k < parts; k++) {
      const at = (x: number) => power(from + (to - from) * (k + x) / parts)
      integral += (at(0) + 4 * at(0.5) + at(1)) / 6
    }
    return sum + integral / parts * (end - start)
  }, 0)
}

/** "2.4 h", "31 d", "1.2 × 10⁵ years" */
function longTime(seconds: number): string {
  if (seconds < 3600) return formatPrefixed(seconds, 's', 3)
  if (seconds < 86_400 * 2) return `${formatNumber(seconds / 3600, 3)} h`
  return seconds < YEAR ? `${formatNumber(seconds / 86_400, 3)} d` : `${formatNumber(seconds / YEAR, 3)} years`
}

function retentionNumbers(spec: JobSpec, problem: Problem): DerivedNumber[] {
  const { rate, by, assumed } = retention(spec, problem)
  const way = by === 'wall' ? 'by a wall' : 'turning as one'
  const prefactor = assumed ? `${way}, 1 GHz assumed` : `${way}`
  const lost = lossWithin(rate, 10 * YEAR)
  return [
    { id: 'retention', label: 'Retention', symbol: 't_ret', value: 1 / rate, text: longTime(1 / rate), formula: assumed ? `t_ret = e^Δ/f, ${prefactor}` : `t_ret: mean first-passage time, ${prefactor}` },
    { id: 'tenYears', label: 'Lost in 10 years', symbol: 'P_10', value: lost, text: `${formatNumber(lost * 1e6, 3)} ppm`, formula: 'P = 1 − exp(−10 a/t_ret), of one cell: ppm of an array' },
    { id: 'failuresInTime', label: 'Failures in 10⁹ h', symbol: 'FIT', value: failuresInTime(rate), text: formatNumber(failuresInTime(rate), 3), formula: 'FIT = 10⁹ h/t_ret, of one cell' },
  ]
}

function rareNumbers(spec: JobSpec, problem: Problem, junction: Junction): DerivedNumber[] {
  const { device, environment } = spec
  const n = problem.numbers
  const list: DerivedNumber[] = []
  if (n.easyAxis === 'x') {
    const effective = -n.diagonal[1]
    list.push({ id: 'outOfPlane', label: 'Out-of-plane field', symbol: 'M_eff', value: effective, text: formatQuantity(effective, 'field', 'mT'), formula: 'M_eff = (N_zz − N_yy) Ms − 2K_i/(μ0 Ms t)' })
  }
  if (device.torque.kind !== 'constant') {
    const p = device.torque.polarization
    const tmr = 2 * p * p / (1 - p * p)
    if (p < 1) list.push({ id: 'julliere', label: 'TMR of such a P', symbol: 'TMR', value: tmr, text: `${formatNumber(tmr * 100, 3)} %`, formula: 'TMR = 2P²/(1 − P²) (Julliere)' })
  }
  if (device.pitch !== undefined) {
    const field = neighbourField(n.saturationMagnetization * n.volume, device.pitch, n.easyAxis)
    list.push({ id: 'neighbourField', label: 'Field of neighbours', symbol: 'H_nb', value: field, text: `± ${formatQuantity(field, 'field', 'mT', 3)}`, formula: 'H_nb = ± Σ Ms V |3cos² − 1|/(4π r³), eight neighbours, best and worst data' })
  }
  if (device.thermalResistance !== undefined) {
    const rise = junction.working(1).temperature - environment.temperature
    list.push({ id: 'temperatureRise', label: 'Heating', symbol: 'ΔT', value: rise, text: formatPrefixed(rise, 'K', 3), formula: 'ΔT = R_th V I, at the mean conductance' })
  }
  return list
}
