import type { EasyAxis } from '#shared/physics/device'
import type { DeterministicPath } from '#shared/schemas/answer'

/** x, y, z triples of the film as the sphere has them, whose third axis is the easy one: y, z, x where it is x. */
function turned<T extends Float32Array | number[]>(values: T, easy: EasyAxis): T {
  if (easy === 'z') return values
  const out = values.slice() as T
  for (let k = 0; k + 2 < out.length; k += 3) {
    out[k] = values[k + 1]!
    out[k + 1] = values[k + 2]!
    out[k + 2] = values[k]!
  }
  return out
}

/** A path for the sphere. */
export const alongEasyAxis = (path: DeterministicPath, easy: EasyAxis): DeterministicPath => easy === 'z' ? path : { ...path, m: turned(path.m, easy) }

/** Paths with noise for the sphere. */
export const noisyAlongEasyAxis = (paths: Float32Array | null, easy: EasyAxis): Float32Array | null => paths && turned(paths, easy)

/** A vector of the sphere in the axes of the film. */
export const filmVector = ([a, b, c]: readonly [number, number, number], easy: EasyAxis): readonly [number, number, number] => easy === 'z' ? [a, b, c] : [c, a, b]
