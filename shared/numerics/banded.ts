/**
 * Complex banded matrices, row by row: entry (r, c) with |r − c| ≤ band sits at r·width + (c − r + band), width = 3·band + 1
 * (the last `band` places take the fill-in of row exchanges). LU with partial pivoting (Golub & Van Loan, section 4.3).
 */
export class BandedLu {
  private readonly width: number
  private readonly re: Float64Array
  private readonly im: Float64Array
  private readonly pivots: Int32Array

  /**
   * Factorises scale·A − pole·M.
   * @param a, m real bands: entry (r, c) at r·(2·band + 1) + (c − r + band)
   */
  constructor(private readonly n: number, private readonly band: number, a: Float64Array, m: Float64Array, scale: number, pole: { re: number, im: number }) {
    const width = this.width = 3 * band + 1
    const re = this.re = new Float64Array(n * width)
    const im = this.im = new Float64Array(n * width)
    const pivots = this.pivots = new Int32Array(n)
    const stored = 2 * band + 1
    for (let r = 0; r < n; r++) {
      for (let k = 0; k < stored; k++) {
        re[r * width + k] = scale * a[r * stored + k]! - pole.re * m[r * stored + k]!
        im[r * width + k] = -pole.im * m[r * stored + k]!
      }
    }
    for (let c = 0; c < n; c++) {
      const last = Math.min(n - 1, c + band)
      let best = c
      let size = -1
      for (let r = c; r <= last; r++) {
        const at = r * width + c - r + band
        const here = Math.abs(re[at]!) + Math.abs(im[at]!)
        if (here > size) {
          size = here
          best = r
        }
      }
      if (!(size > 0)) throw new RangeError('singular banded matrix')
      pivots[c] = best
      const far = Math.min(n - 1, c + 2 * band)
      if (best !== c) {
        for (let col = c; col <= far; col++) {
          const p = c * width + col - c + band
          const q = best * width + col - best + band
          const [tr, ti] = [re[p]!, im[p]!]
          re[p] = re[q]!
          im[p] = im[q]!
          re[q] = tr
          im[q] = ti
        }
      }
      const d = c * width + band
      const norm = re[d]! * re[d]! + im[d]! * im[d]!
      const ir = re[d]! / norm
      const ii = -im[d]! / norm
      for (let r = c + 1; r <= last; r++) {
        const at = r * width + c - r + band
        const fr = re[at]! * ir - im[at]! * ii
        const fi = re[at]! * ii + im[at]! * ir
        re[at] = fr
        im[at] = fi
        if (fr === 0 && fi === 0) continue
        for (let col = c + 1; col <= far; col++) {
          const p = c * width + col - c + band
          const q = r * width + col - r + band
          re[q]! -= fr * re[p]! - fi * im[p]!
          im[q]! -= fr * im[p]! + fi * re[p]!
        }
      }
    }
  }

  /** Solves in place for the right-hand side (xr, xi). */
  solve(xr: Float64Array, xi: Float64Array): void {
    const { n, band, width, re, im, pivots } = this
    for (let c = 0; c < n; c++) {
      const p = pivots[c]!
      if (p !== c) {
        const [tr, ti] = [xr[c]!, xi[c]!]
        xr[c] = xr[p]!
        xi[c] = xi[p]!
        xr[p] = tr
        xi[p] = ti
      }
      const vr = xr[c]!
      const vi = xi[c]!
      const last = Math.min(n - 1, c + band)
      for (let r = c + 1; r <= last; r++) {
        const at = r * width + c - r + band
        xr[r]! -= re[at]! * vr - im[at]! * vi
        xi[r]! -= re[at]! * vi + im[at]! * vr
      }
    }
    for (let r = n - 1; r >= 0; r--) {
      let sr = xr[r]!
      let si = xi[r]!
      const far = Math.min(n - 1, r + 2 * band)
      for (let c = r + 1; c <= far; c++) {
        const at = r * width + c - r + band
        sr -= re[at]! * xr[c]! - im[at]! * xi[c]!
        si -= re[at]! * xi[c]! + im[at]! * xr[c]!
      }
      const d = r * width + band
      const norm = re[d]! * re[d]! + im[d]! * im[d]!
      xr[r] = (sr * re[d]! + si * im[d]!) / norm
      xi[r] = (si * re[d]! - sr * im[d]!) / norm
    }
  }

  /** Solves with the transposed matrix, in place. */
  solveTransposed(xr: Float64Array, xi: Float64Array): void {
    const { n, band, width, re, im, pivots } = this
    for (let c = 0; c < n; c++) {
      let sr = xr[c]!
      let si = xi[c]!
      for (let r = Math.max(0, c - 2 * band); r < c; r++) {
        const at = r * width + c - r + band
        sr -= re[at]! * xr[r]! - im[at]! * xi[r]!
        si -= re[at]! * xi[r]! + im[at]! * xr[r]!
      }
      const d = c * width + band
      const norm = re[d]! * re[d]! + im[d]! * im[d]!
      xr[c] = (sr * re[d]! + si * im[d]!) / norm
      xi[c] = (si * re[d]! - sr * im[d]!) / norm
    }
    for (let c = n - 1; c >= 0; c--) {
      const last = Math.min(n - 1, c + band)
      for (let r = c + 1; r <= last; r++) {
        const at = r * width + c - r + band
        xr[c]! -= re[at]! * xr[r]! - im[at]! * xi[r]!
        xi[c]! -= re[at]! * xi[r]! + im[at]! * xr[r]!
      }
      const p = pivots[c]!
      if (p !== c) {
        const [tr, ti] = [xr[c]!, xi[c]!]
        xr[c] = xr[p]!
        xi[c] = xi[p]!
        xr[p] = tr
        xi[p] = ti
      }
    }
  }
}
