import type { JobSpec } from '../schemas/job'
import { formatNumber } from '../utils/format'
import { formatPrefixed, formatQuantity } from '../utils/quantity'
import { diametersOf } from './device'
import { Junction } from './drive'
import type { Problem } from './problem'
import { wallNumbers } from './retention'

/** What limits the numbers of this job, each in words of its own. */
export function cautions(spec: JobSpec, problem: Problem): string[] {
  const { device, environment, write } = spec
  const { crossoverDiameter, wallBarrier } = wallNumbers(spec, problem)
  const narrow = diametersOf(device)[1]
  const diameter = formatPrefixed(narrow, 'm', 3)
  const list: string[] = []
  if (narrow > crossoverDiameter) {
    list.push(`At ${diameter} a wall (barrier ${formatNumber(wallBarrier, 3)}) costs less than turning as one (${formatNumber(problem.numbers.stability, 3)}): above ${formatPrefixed(crossoverDiameter, 'm', 3)} walls or nuclei carry the reversal, and this single moment is only a guide.`)
  }
  else {
    list.push(`One moment is assumed. At ${diameter} turning as one (barrier ${formatNumber(problem.numbers.stability, 3)}) costs less than a wall (${formatNumber(wallBarrier, 3)}); edges and defects may still start a nucleus. Confirm by measurement before a margin depends on it.`)
  }
  if (problem.numbers.stability < 10) list.push(`With Δ = ${formatNumber(problem.numbers.stability, 3)} the states blur into one another: the cell flips by itself within about a pulse’s time scale, and a “write” is not well defined.`)
  if (problem.reducedDrive < 1 && problem.reducedDrive > 0) list.push(`The drive is below the critical one (i = ${formatNumber(problem.reducedDrive, 3)}): only heat takes the moment over, and times spread over many decades.`)
  const lawful = device.magnetizationTemperature !== undefined
  if (!lawful && environment.temperature !== (device.materialTemperature ?? 298.15)) list.push(`Material values are used as given at ${formatQuantity(environment.temperature, 'temperature', '°C', 3)}; damping, magnetization and anisotropy usually fall or rise on the way from ${device.materialTemperature === undefined ? 'room temperature' : 'where they were given'}.`)
  if (!lawful && (device.thermalResistance ?? 0) > 0) list.push('The drive heats the noise alone: no law says how magnetization and anisotropy fall on the way.')
  if (device.magnetizationTemperature !== undefined && device.anisotropyExponent === undefined) list.push('Magnetization follows the temperature, interface anisotropy does not: no exponent is given.')
  const { voltage, temperature } = new Junction(spec, problem.numbers).working(1)
  if (temperature > 0.8 * (device.magnetizationTemperature ?? Infinity)) list.push(`The drive heats the layer to ${formatQuantity(temperature, 'temperature', 'K', 3)}, close to where Ms vanishes.`)
  if (write.drive.kind !== 'voltage' && (device.voltageAnisotropy || device.fieldLikeQuadratic)) list.push(`Anisotropy and quadratic field-like torque follow the voltage at the mean conductance (${formatPrefixed(Math.abs(voltage), 'V', 3)}), whatever the angle.`)
  if (write.drive.kind === 'voltage') {
    const tmr = device.tunnelMagnetoresistance
    const fromTmr = Math.sqrt(tmr / (2 + tmr))
    const used = device.torque.kind === 'constant' ? device.torque.efficiency : device.torque.polarization
    if (Math.abs(used * used - tmr / (2 + tmr)) > 0.1 * (tmr / (2 + tmr))) list.push(`The torque’s polarization (${formatNumber(used, 3)}) and the TMR (which asks for ${formatNumber(fromTmr, 3)}) disagree: P² should be TMR/(2 + TMR).`)
    list.push(device.halfVoltage === undefined ? 'TMR is taken constant in voltage; barrier wear and breakdown are not predicted.' : 'Barrier wear and breakdown are not predicted.')
  }
  return list
}
