/**
 * Carlson's symmetric elliptic integral R_D(x, y, z) = 3/2 ∫₀^∞ dt / [√(t+x) √(t+y) (t+z)^(3/2)] by duplication (Carlson, Numer. Math. 33, 1
 * (1979)). Relative error below 1e-13.
 * @param z positive; of x and y at most one is 0, none negative
 */
export function carlsonRD(x: number, y: number, z: number): number {
  let sum = 0
  let factor = 1
  for (let n = 0; n < 60; n++) {
    const mean = (x + y + 3 * z) / 5
    const [dx, dy, dz] = [1 - x / mean, 1 - y / mean, 1 - z / mean]
    if (Math.max(Math.abs(dx), Math.abs(dy), Math.abs(dz)) < 2e-3) {
      const ea = dx * dy
      const eb = dz * dz
      const ec = ea - eb
      const ed = ea - 6 * eb
      const ee = ed + ec + ec
      return 3 * sum + factor * (1 + ed * (-3 / 14 + 9 / 88 * ed - 9 / 52 * dz * ee) + dz * (ee / 6 + dz * (-9 / 22 * ec + 3 / 26 * dz * ea))) / (mean * Math.sqrt(mean))
    }
    const [rx, ry, rz] = [Math.sqrt(x), Math.sqrt(y), Math.sqrt(z)]
    const lambda = rx * (ry + rz) + ry * rz
    sum += factor / (rz * (z + lambda))
    factor /= 4
    x = (x + lambda) / 4
    y = (y + lambda) / 4
    z = (z + lambda) / 4
  }
  throw new RangeError('R_D does not converge')
}
