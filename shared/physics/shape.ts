import { carlsonRD } from '../numerics/carlson'
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

/** Angles of the quadrature over the rim; the integrand is smooth and periodic, so that few are enough for any cell. */
const RIM_POINTS = 720

/**
 * The three magnetometric factors (x, y, z) of a uniformly magnetized elliptic cylinder (Beleggia, De Graef, Millev, Goode & Rowlands,
 * J. Phys. D 38, 3333 (2005), from memory; here from the overlap of the ellipse with its shifted copy: the distance integral is a pair of
 * complete elliptic integrals, the angle is left to quadrature). Their sum is 1.
 * @param thickness m
 * @param dx diameter along x, m
 * @param dy diameter along y, m
 */
export function ellipticCylinderFactors(thickness: number, dx: number, dy: number): [number, number, number] {
  const [a, b] = [dx / 2, dy / 2]
  let [nx, ny] = [0, 0]
  for (let k = 0; k < RIM_POINTS; k++) {
    const phi = (k + 0.5) / RIM_POINTS * Math.PI / 2
    const [cosine, sine] = [Math.cos(phi), Math.sin(phi)]
    const g2 = (a * cosine) ** 2 + (b * sine) ** 2
    const diagonal = Math.sqrt(thickness * thickness + 4 * g2)
    const k2 = 4 * g2 / (diagonal * diagonal)
    const { K, E } = completeElliptic(Math.sqrt(k2))
    const radial = diagonal * ((1 - k2) * K + (2 * k2 - 1) * E) / (3 * k2) - 2 * Math.sqrt(g2) / 3
    nx += cosine * cosine / g2 * radial
    ny += sine * sine / g2 * radial
  }
  const weight = 4 * a * b / (Math.PI * thickness * RIM_POINTS)
  return [nx * weight, ny * weight, 1 - (nx + ny) * weight]
}

/** The three factors of an ellipsoid with axes dx, dy, dz (Osborn, Phys. Rev. 67, 351 (1945), in Carlson's form); their sum is 1. */
export function ellipsoidFactors(dx: number, dy: number, dz: number): [number, number, number] {
  const longest = Math.max(dx, dy, dz)
  const [a, b, c] = [(dx / longest) ** 2, (dy / longest) ** 2, (dz / longest) ** 2]
  const third = Math.sqrt(a * b * c) / 3
  return [third * carlsonRD(b, c, a), third * carlsonRD(c, a, b), third * carlsonRD(a, b, c)]
}
