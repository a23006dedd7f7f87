import type { Device, JobSpec } from '../schemas/job'
import { BOLTZMANN, VACUUM_PERMEABILITY } from './constants'
import { PhysicsError } from './errors'
import { cylinderFactors, ellipsoidFactors, ellipticCylinderFactors } from './shape'

type Triple = [number, number, number]

/**
 * Axes of the film by the axes of the solver, whose z is the easy axis: the solver's component k is the film's component FRAMES[e][k].
 * Both are proper rotations, so that no sign changes.
 */
export const FRAMES = { z: [0, 1, 2], x: [1, 2, 0] } as const
export type EasyAxis = keyof typeof FRAMES

/** A vector of the film's frame (x long axis, z normal) in the solver's. */
export const toSolver = (axis: EasyAxis, v: Triple): Triple => [v[FRAMES[axis][0]], v[FRAMES[axis][1]], v[FRAMES[axis][2]]]

/** Turns unit vectors x, y, z of the solver's frame, one after the other, into the film's, in place. */
export function toFilm(axis: EasyAxis, values: Float32Array | number[]): void {
  if (axis === 'z') return
  for (let k = 0; k + 2 < values.length; k += 3) {
    const [y, z, x] = [values[k]!, values[k + 1]!, values[k + 2]!]
    values[k] = x
    values[k + 1] = y
    values[k + 2] = z
  }
}

export const easyAxisOf = (device: Device): EasyAxis => device.anisotropy.kind === 'inPlane' ? 'x' : 'z'

/** Diameters along x and y, m. */
export const diametersOf = (device: Device): [number, number] => [device.diameter, device.secondDiameter ?? device.diameter]

/** Demagnetizing factors of the free layer along x, y and z. */
export function shapeFactors(device: Device): Triple {
  const [dx, dy] = diametersOf(device)
  if (dy > dx) throw new PhysicsError(['device', 'secondDiameter'], 'The second diameter is the shorter one: x is the long axis of the cell.')
  if (device.shape === 'ellipsoid') return ellipsoidFactors(dx, dy, device.thickness)
  return dx === dy ? cylinderFactors(device.thickness, dx) : ellipticCylinderFactors(device.thickness, dx, dy)
}

/** What the layer is made of at some temperature. Fields in A/m. */
export interface Material {
  saturationMagnetization: number
  tunnelMagnetoresistance: number
  /** diagonal of the quadratic field along x, y, z of the film, less a part that is the same along all */
  diagonal: Triple
}

/** Where values are given when nothing says otherwise, K. */
const ROOM_TEMPERATURE = 298.15

/**
 * Material values at a temperature: Ms ∝ 1 − (T/T_0)^(3/2) (Bloch's law), K_i ∝ Msⁿ, TMR · (1 − s (T − T_m)); as given where no law is.
 * @param temperature K
 * @throws PhysicsError where the layer is not magnetic there
 */
export function materialAt(device: Device, factors: Triple, temperature: number): Material {
  const given = device.materialTemperature ?? ROOM_TEMPERATURE
  const bloch = (t: number) => 1 - (t / device.magnetizationTemperature!) ** 1.5
  const ratio = device.magnetizationTemperature === undefined ? 1 : bloch(temperature) / bloch(given)
  if (!(ratio > 0 && Number.isFinite(ratio)) || (device.magnetizationTemperature ?? Infinity) <= given) {
    throw new PhysicsError(['device', 'magnetizationTemperature'], `At ${temperature.toFixed(0)} K the free layer is not magnetic: Ms vanishes at ${device.magnetizationTemperature} K.`)
  }
  const ms = device.saturationMagnetization * ratio
  const over = factors[2] - factors[0]
  const uniaxial = device.uniaxialField ?? 0
  const inFilm = factors[1] === factors[0] ? 0 : (factors[1] - factors[0]) * ms
  const { anisotropy } = device
  let normal: number
  if (anisotropy.kind === 'effectiveField' && ratio === 1) normal = anisotropy.anisotropyField
  else {
    const interfaceAnisotropy = anisotropy.kind === 'effectiveField'
      ? 0.5 * VACUUM_PERMEABILITY * device.saturationMagnetization * device.thickness * (anisotropy.anisotropyField + device.saturationMagnetization * over)
      : anisotropy.interfaceAnisotropy
    normal = 2 * interfaceAnisotropy * ratio ** (device.anisotropyExponent ?? 0) / (VACUUM_PERMEABILITY * ms * device.thickness) - ms * over
  }
  return {
    saturationMagnetization: ms,
    tunnelMagnetoresistance: Math.max(0, device.tunnelMagnetoresistance * (1 - (device.tmrSlope ?? 0) * (temperature - given))),
    diagonal: [uniaxial, 0 - inFilm, normal],
  }
}

/** Sizes of the free layer and its junction. All SI. */
export interface DeviceNumbers {
  area: number
  volume: number
  easyAxis: EasyAxis
  /** demagnetizing factors along x, y, z of the film */
  factors: Triple
  saturationMagnetization: number
  tunnelMagnetoresistance: number
  /** field of the lowest barrier between the two states, shape included: H_k of a perpendicular cell */
  anisotropyField: number
  /** K_eff = ½ μ0 Ms H_k, J/m³ */
  anisotropyEnergy: number
  /** Δ = K_eff V/(kB T) */
  stability: number
  /** quadratic field along the solver's axes, A/m; the first is 0 */
  diagonal: Triple
  /** mean stiffness of the two directions across the easy axis at zero field, A/m: H_k where they are alike */
  stiffness: number
  /** Nzz − Nxx */
  shapeDifference: number
  parallelResistance: number
  antiparallelResistance: number
}

/**
 * @throws PhysicsError where no easy axis is along the axis that is asked for
 */
export function deviceNumbers(spec: JobSpec): DeviceNumbers {
  const { device, environment } = spec
  const [dx, dy] = diametersOf(device)
  const area = Math.PI * (dx === dy ? dx ** 2 : dx * dy) / 4
  const volume = area * device.thickness
  const easyAxis = easyAxisOf(device)
  const factors = shapeFactors(device)
  const shapeDifference = easyAxis === 'z' && dx === dy ? (3 * factors[2] - 1) / 2 : factors[2] - factors[0]
  const { saturationMagnetization: ms, tunnelMagnetoresistance, diagonal: film } = materialAt(device, factors, environment.temperature)
  const raw = toSolver(easyAxis, film)
  const diagonal: Triple = [0, raw[1] - raw[0], raw[2] - raw[0]]
  const anisotropyField = Math.min(diagonal[2], diagonal[2] - diagonal[1])
  if (!(anisotropyField > 0)) throw noEasyAxis(spec, ms, factors, film)
  const anisotropyEnergy = VACUUM_PERMEABILITY * ms * anisotropyField / 2
  const parallelResistance = device.resistanceArea / area
  return {
    area, volume, easyAxis, factors, saturationMagnetization: ms, tunnelMagnetoresistance, anisotropyField, anisotropyEnergy, diagonal, shapeDifference,
    stiffness: (diagonal[2] + (diagonal[2] - diagonal[1])) / 2,
    stability: anisotropyEnergy * volume / (BOLTZMANN * environment.temperature),
    parallelResistance,
    antiparallelResistance: parallelResistance * (1 + tunnelMagnetoresistance),
  }
}

function noEasyAxis({ device }: JobSpec, ms: number, factors: Triple, film: Triple): PhysicsError {
  const { anisotropy, thickness } = device
  if (anisotropy.kind === 'effectiveField') {
    return new PhysicsError(['device', 'anisotropy', 'anisotropyField'], 'The in-plane uniaxial field outweighs the anisotropy field: the easy axis lies in the film.')
  }
  const perField = 0.5 * VACUUM_PERMEABILITY * ms * thickness
  if (anisotropy.kind === 'interface') {
    const needed = perField * (ms * (factors[2] - factors[0]) + film[0])
    return new PhysicsError(['device', 'anisotropy', 'interfaceAnisotropy'], `The easy axis lies in the film: shape outweighs the interface below ${(needed * 1e3).toPrecision(3)} mJ/m² for this layer.`)
  }
  if (film[0] - film[1] <= 0) return new PhysicsError(['device', 'secondDiameter'], 'Nothing holds the moment along x: make the cell an ellipse with its long axis along x, or give an in-plane uniaxial field.')
  const most = perField * (ms * (factors[2] - factors[0]) + film[0])
  return new PhysicsError(['device', 'anisotropy', 'interfaceAnisotropy'], `The easy axis leaves the film: the interface outweighs shape above ${(most * 1e3).toPrecision(3)} mJ/m² for this layer.`)
}
