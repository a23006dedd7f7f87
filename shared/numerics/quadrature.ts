/** Nodes and weights of Gauss–Legendre quadrature on (−1, 1), by Newton's method on P_n (Abramowitz & Stegun 25.4.29). */
export function gaussLegendre(n: number): { nodes: Float64Array, weights: Float64Array } {
  const nodes = new Float64Array(n)
  const weights = new Float64Array(n)
  for (let k = 0; k < n; k++) {
    let x = Math.cos(Math.PI * (k + 0.75) / (n + 0.5))
    let slope = 1
    for (let iteration = 0; iteration < 100; iteration++) {
      let [before, now] = [1, x]
      for (let l = 2; l <= n; l++) [before, now] = [now, ((2 * l - 1) * x * now - (l - 1) * before) / l]
      slope = n * (x * now - before) / (x * x - 1)
      const change = now / slope
      x -= change
      if (Math.abs(change) < 1e-16) break
    }
    nodes[k] = x
    weights[k] = 2 / ((1 - x * x) * slope * slope)
  }
  return { nodes, weights }
}
