import { completeElliptic } from '../numerics/elliptic'

/**
 * Magnetometric demagnetizing factor along the axis of a uniformly magnetized circular cylinder.
 * N_z = 1 − K_L with K_L Nagaoka's coefficient of the current sheet that has the same field
 * (Lorenz's form; Joseph, J. Appl. Phys. 37, 4639 (1966); Chen, Brug & Goldfarb, IEEE Trans. Magn. 27, 3601 (1991)).
 * @param thickness m
 * @param diameter m
 */
export function cylinderAxialFactor(thickness: number, diameter: number): number {
  const diagonal = Math.hypot(thickness, diameter)
  const k = diameter / diagonal
  const kPrime = thickness / diagonal
  const { K, E } = completeElliptic(k)
  const nagaoka = 4 / (3 * Math.PI * kPrime) * ((kPrime / k) ** 2 * (K - E) + E - k)
  return 1 - nagaoka
}

/** The three factors (x, y, z) of a circular cylinder; their sum is 1. */
export function cylinderFactors(thickness: number, diameter: number): [number, number, number] {
  const nz = cylinderAxialFactor(thickness, diameter)
  return [(1 - nz) / 2, (1 - nz) / 2, nz]
}
