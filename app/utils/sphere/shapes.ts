/** Half-opening of the pole caps, rad. */
export const CAP = 0.16

const ring = (z: number, steps: number): number[] => {
  const q = Math.sqrt(1 - z * z)
  return Array.from({ length: steps + 1 }, (_, k) => {
    const a = 2 * Math.PI * k / steps
    return [q * Math.cos(a), q * Math.sin(a), z]
  }).flat()
}

const meridian = (azimuth: number, steps: number): number[] => Array.from({ length: steps + 1 }, (_, k) => {
  const t = 2 * Math.PI * k / steps
  return [Math.sin(t) * Math.cos(azimuth), Math.sin(t) * Math.sin(azimuth), Math.cos(t)]
}).flat()

/** Great circles through the poles every 30° and parallels every 30°, without the equator: x, y, z of each point in turn. */
export const gridCurves = (steps = 96): number[][] => [
  ...Array.from({ length: 6 }, (_, k) => meridian(k * Math.PI / 6, steps)),
  ...[60, 30, -30, -60].map(latitude => ring(Math.sin(latitude * Math.PI / 180), steps)),
]

export const equator = (steps = 128): number[] => ring(0, steps)

/** Rim of the cap around a pole. */
export const capRim = (pole: 1 | -1, steps = 48): number[] => ring(pole * Math.cos(CAP), steps)

/** Curves as separate pieces, start and end of each in turn, for drawing many curves at once. */
export function asPieces(curves: readonly ArrayLike<number>[]): Float32Array {
  const pieces = new Float32Array(curves.reduce((sum, curve) => sum + Math.max(0, curve.length / 3 - 1) * 6, 0))
  let at = 0
  for (const curve of curves) {
    for (let k = 0; k + 5 < curve.length; k += 3) {
      for (let c = 0; c < 6; c++) pieces[at++] = curve[k + c]!
    }
  }
  return pieces
}

type Triple = readonly [number, number, number]

/** Quadratic and uniform field in units of H_k, along axes of which the third is the easy one. */
export interface EnergyShape { diagonal: Triple, field: Triple }

/** Energy of the moment in units of K_eff V: E = −d·m² − 2 h·m; −cos²θ where the cell is axial. */
export const energyAt = (x: number, y: number, z: number, { diagonal: d, field: h }: EnergyShape): number =>
  -(d[0] * x * x + d[1] * y * y + d[2] * z * z) - 2 * (h[0] * x + h[1] * y + h[2] * z)

/**
 * Lines of equal energy, by marching over a grid of equal angles: pieces of start and end, x, y, z each.
 * @param levels number of lines between the lowest and the highest energy
 */
export function energyContours(shape: EnergyShape, levels = 9, rows = 60): Float32Array {
  const columns = 2 * rows
  const theta = (i: number) => Math.PI * i / rows
  const phi = (j: number) => 2 * Math.PI * j / columns
  const point = (i: number, j: number): [number, number, number] => [Math.sin(theta(i)) * Math.cos(phi(j)), Math.sin(theta(i)) * Math.sin(phi(j)), Math.cos(theta(i))]
  const energy = Array.from({ length: rows + 1 }, (_, i) => Array.from({ length: columns + 1 }, (_, j) => energyAt(...point(i, j), shape)))
  const all = energy.flat()
  const low = all.reduce((a, b) => Math.min(a, b))
  const high = all.reduce((a, b) => Math.max(a, b))
  const pieces: number[] = []
  for (let n = 1; n <= levels; n++) {
    const level = low + (high - low) * n / (levels + 1)
    for (let i = 0; i < rows; i++) {
      for (let j = 0; j < columns; j++) {
        const corners: [number, number][] = [[i, j], [i + 1, j], [i + 1, j + 1], [i, j + 1]]
        const cuts: [number, number, number][] = []
        for (let c = 0; c < 4; c++) {
          const [a, b] = [corners[c]!, corners[(c + 1) % 4]!]
          const [ea, eb] = [energy[a[0]]![a[1]]! - level, energy[b[0]]![b[1]]! - level]
          if ((ea < 0) === (eb < 0)) continue
          const f = ea / (ea - eb)
          cuts.push(point(a[0] + f * (b[0] - a[0]), a[1] + f * (b[1] - a[1])))
        }
        for (let c = 0; c + 1 < cuts.length; c += 2) pieces.push(...cuts[c]!, ...cuts[c + 1]!)
      }
    }
  }
  return new Float32Array(pieces)
}
