import { Group } from 'three'
import type { Palette } from '~/composables/usePalette'
import { asPieces, capRim, energyContours, equator, gridCurves } from './shapes'
import type { EnergyShape } from './shapes'
import { cap, rgb, sharedUniforms, strokes, type Drawn } from './strokes'
import { turnMatrix, type View } from './view'

export interface Curve {
  /** x, y, z of samples at equal intervals */
  points: Float32Array
  /** share of the samples that is drawn; what comes after rests on a pole */
  drawn: number
}

/** Shares of the samples between which the colour goes from the near pole's to the far pole's, and up to which it is drawn in full. */
export type Stretch = readonly [first: number, last: number, until: number]

const ORDER = { contours: 1, grid: 2, caps: 3, noisy: 4, quiet: 5, limb: 150 }

/** All that one canvas draws of the sphere. Three.js objects, made once and changed in place. */
export class SphereScene {
  readonly root = new Group()
  private readonly shared = sharedUniforms()
  private readonly grid = this.add(strokes(this.shared, asPieces(gridCurves()), { width: 0.9, front: 1, behind: 0.4 }, ORDER.grid, true))
  private readonly equator = this.add(strokes(this.shared, new Float32Array(equator()), { width: 1, front: 1, behind: 0.35 }, ORDER.grid))
  private readonly limb = this.add(strokes(this.shared, limbCurve(), { width: 1.1, front: 1, behind: 1, turns: false }, ORDER.limb))
  private readonly north = this.add(cap(this.shared, 1, capRim(1), ORDER.caps))
  private readonly south = this.add(cap(this.shared, -1, capRim(-1), ORDER.caps))
  // The edges of the filled caps are ragged without multisampling; a stroke along them is not.
  private readonly northRim = this.add(strokes(this.shared, new Float32Array(capRim(1)), { width: 1, front: 0.9, behind: 0.3 }, ORDER.caps))
  private readonly southRim = this.add(strokes(this.shared, new Float32Array(capRim(-1)), { width: 1, front: 0.9, behind: 0.3 }, ORDER.caps))
  private quiet: Drawn | null = null
  private noisy: Drawn[] = []
  private contours: Drawn | null = null
  private palette: Palette | null = null
  private near: 1 | -1 = 1
  private stretch: Stretch = [0, 1, 2]

  setView(view: View) {
    this.shared.turn.value.fromArray(turnMatrix(view))
  }

  /** @param radius of the sphere in a canvas of that size, CSS px; `ratio`: screen pixels for each of them */
  setSize(width: number, height: number, radius: number, ratio: number) {
    this.shared.pixel.value = 1 / ratio
    this.shared.half.value.set(width / 2, height / 2)
    this.shared.radius.value = radius
  }

  setLook(palette: Palette, near: 1 | -1) {
    this.palette = palette
    this.near = near
    rgb(this.shared.paper.value, palette.paper)
    this.grid.colour(palette.rule)
    this.equator.colour(palette.soft)
    this.limb.colour(palette.soft)
    for (const one of [this.north, this.northRim]) one.colour(near === 1 ? palette.near : palette.far)
    for (const one of [this.south, this.southRim]) one.colour(near === 1 ? palette.far : palette.near)
    this.contours?.colour(palette.soft)
    for (const curve of [this.quiet, ...this.noisy]) curve?.colour(palette.near, palette.far)
  }

  setQuiet(curve: Curve | null) {
    this.quiet = this.swap(this.quiet, curve && strokes(this.shared, curve.points, { width: 2, front: 1, behind: 0.32, drawn: curve.drawn }, ORDER.quiet))
    this.quiet?.stretch(...this.stretch)
    this.paint()
  }

  setNoisy(curves: readonly Curve[]) {
    this.noisy.forEach(one => this.drop(one))
    const many = curves.length > 12
    this.noisy = curves.map(curve => this.add(strokes(this.shared, curve.points, { width: many ? 0.8 : 1.1, front: many ? 0.62 : 0.8, behind: 0.2, drawn: curve.drawn }, ORDER.noisy)))
    this.noisy.forEach(one => one.stretch(...this.stretch))
    this.paint()
  }

  setStretch(stretch: Stretch) {
    this.stretch = stretch
    for (const curve of [this.quiet, ...this.noisy]) curve?.stretch(...stretch)
  }

  /** Lines of equal energy; null for none. */
  setContours(shape: EnergyShape | null) {
    this.contours = this.swap(this.contours, shape && strokes(this.shared, energyContours(shape), { width: 0.8, front: 0.55, behind: 0.15 }, ORDER.contours, true))
    this.paint()
  }

  dispose() {
    for (const one of [this.grid, this.equator, this.limb, this.north, this.south, this.northRim, this.southRim, this.quiet, this.contours, ...this.noisy]) one?.dispose()
    this.root.clear()
  }

  private paint() {
    if (this.palette) this.setLook(this.palette, this.near)
  }

  private add(one: Drawn): Drawn {
    this.root.add(...one.meshes)
    return one
  }

  private drop(one: Drawn) {
    this.root.remove(...one.meshes)
    one.dispose()
  }

  private swap(before: Drawn | null, after: Drawn | null): Drawn | null {
    if (before) this.drop(before)
    return after && this.add(after)
  }
}

/** The outline, in the observer's frame, a hair in front so that it counts as facing. */
function limbCurve(): Float32Array {
  const steps = 180
  return new Float32Array(Array.from({ length: steps + 1 }, (_, k) => [Math.cos(2 * Math.PI * k / steps), Math.sin(2 * Math.PI * k / steps), 1e-3]).flat())
}
