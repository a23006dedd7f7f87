import {
  BufferGeometry, Color, DoubleSide, Float32BufferAttribute, GLSL3, InstancedBufferGeometry, InstancedInterleavedBuffer, InterleavedBufferAttribute,
  Mesh, ShaderMaterial, Vector2, Matrix3,
} from 'three'

/** Uniforms that every stroke of one canvas shares: where it is seen from, how large it is, the ground it fades into. */
export const sharedUniforms = () => ({
  turn: { value: new Matrix3() },
  /** half the canvas, CSS px */
  half: { value: new Vector2(1, 1) },
  /** radius of the sphere, CSS px */
  radius: { value: 1 },
  paper: { value: new Color() },
  /** one pixel of the screen, CSS px */
  pixel: { value: 1 },
})
export type SharedUniforms = ReturnType<typeof sharedUniforms>

export interface StrokeStyle {
  /** CSS px */
  width: number
  /** how much of the colour is left of the ground's, in front of the limb and behind it */
  front: number
  behind: number
  /** share of the pieces that is drawn at all, all of them by default */
  drawn?: number
  /** turned with the view; false for what is drawn in the observer's own frame */
  turns?: boolean
}

const VERTEX = `
in vec3 from;
in vec3 to;
uniform mat3 turn;
uniform vec2 half_;
uniform float radius, width, count, pixel;
uniform bool turns;
out float facing, share, across;
void main() {
  vec3 a = turns ? turn * from : from;
  vec3 b = turns ? turn * to : to;
  vec2 pa = a.xy * radius, pb = b.xy * radius;
  vec2 along = pb - pa;
  float len = length(along);
  vec2 dir = len > 1e-5 ? along / len : vec2(1.0, 0.0);
  // Half a screen pixel more on both sides for the soft edge, and a little at the ends, so that bends stay closed.
  across = position.y * (width + pixel) * 0.5;
  vec2 p = mix(pa, pb, position.x) + vec2(-dir.y, dir.x) * across + dir * (position.x * 2.0 - 1.0) * width * 0.06;
  facing = mix(a.z, b.z, position.x);
  share = (float(gl_InstanceID) + position.x) / count;
  gl_Position = vec4(p / half_, 0.0, 1.0);
}`

const FRAGMENT = `
in float facing, share, across;
uniform vec3 near, far, paper;
uniform float side, strength, firstShare, lastShare, until, width, pixel;
out vec4 colour;
void main() {
  if (facing * side < 0.0) discard;
  float along = clamp((share - firstShare) / max(1e-6, lastShare - firstShare), 0.0, 1.0);
  float kept = strength * (share > until ? 0.25 : 1.0);
  // Coverage of the pixel by a line of that width: thinner than a pixel is fainter, not broken.
  float covered = clamp(((width + pixel) * 0.5 - abs(across)) / pixel, 0.0, 1.0) * min(1.0, width / pixel);
  colour = vec4(mix(paper, mix(near, far, along), kept) * covered, covered);
}`

const CAP_VERTEX = `
uniform mat3 turn;
uniform vec2 half_;
uniform float radius;
out float facing;
void main() {
  vec3 p = turn * position;
  facing = p.z;
  gl_Position = vec4(p.xy * radius / half_, 0.0, 1.0);
}`

const CAP_FRAGMENT = `
in float facing;
uniform vec3 near, paper;
uniform float side, strength;
out vec4 colour;
void main() {
  if (facing * side < 0.0) discard;
  colour = vec4(mix(paper, near, strength), 1.0);
}`

/** Corners of the ribbon that is drawn for every piece: along 0 to 1, across −1 to 1. */
const CORNERS = [0, -1, 0, 1, -1, 0, 1, 1, 0, 0, -1, 0, 1, 1, 0, 0, 1, 0]

function material(shared: SharedUniforms, vertexShader: string, fragmentShader: string, side: 1 | -1, own: Record<string, { value: unknown }>): ShaderMaterial {
  return new ShaderMaterial({
    glslVersion: GLSL3, vertexShader, fragmentShader, depthTest: false, depthWrite: false, side: DoubleSide, transparent: true, premultipliedAlpha: true,
    uniforms: { turn: shared.turn, half_: shared.half, radius: shared.radius, paper: shared.paper, pixel: shared.pixel, side: { value: side }, ...own },
  })
}

/** One thing that is drawn twice: what lies behind the limb first, what lies in front later. */
export interface Drawn {
  meshes: Mesh[]
  colour: (near: string, far?: string) => void
  /** shares of the curve between which the colour goes from near to far, and the share up to which it is drawn in full */
  stretch: (first: number, last: number, until: number) => void
  dispose: () => void
}

function drawn(geometry: BufferGeometry, make: (side: 1 | -1) => ShaderMaterial, order: number): Drawn {
  const meshes = ([-1, 1] as const).map((side) => {
    const mesh = new Mesh(geometry, make(side))
    mesh.frustumCulled = false
    mesh.renderOrder = order + (side === 1 ? 100 : 0)
    return mesh
  })
  const each = (act: (uniforms: ShaderMaterial['uniforms']) => void) => meshes.forEach(mesh => act((mesh.material as ShaderMaterial).uniforms))
  return {
    meshes,
    colour: (near, far = near) => each((uniforms) => {
      rgb(uniforms.near?.value, near)
      rgb(uniforms.far?.value, far)
    }),
    stretch: (first, last, until) => each((uniforms) => {
      if (uniforms.firstShare) uniforms.firstShare.value = first
      if (uniforms.lastShare) uniforms.lastShare.value = last
      if (uniforms.until) uniforms.until.value = until
    }),
    dispose: () => {
      geometry.dispose()
      meshes.forEach(mesh => (mesh.material as ShaderMaterial).dispose())
    },
  }
}

/** A token's colour as the shader writes it: the style sheet's own numbers, without a change of colour space. */
export function rgb(target: unknown, hex: string) {
  if (!(target instanceof Color)) return
  const [r, g, b] = [1, 3, 5].map(k => Number.parseInt(hex.slice(k, k + 2), 16) / 255) as [number, number, number]
  target.r = r
  target.g = g
  target.b = b
}

/**
 * Strokes of an even width in px along pieces of curves.
 * @param points x, y, z; a continuous curve, or with `pieces` the start and end of each piece in turn
 */
export function strokes(shared: SharedUniforms, points: Float32Array, style: StrokeStyle, order: number, pieces = false): Drawn {
  const stride = pieces ? 6 : 3
  const count = Math.max(0, pieces ? points.length / 6 : points.length / 3 - 1)
  const geometry = new InstancedBufferGeometry()
  geometry.instanceCount = Math.ceil(count * (style.drawn ?? 1))
  geometry.setAttribute('position', new Float32BufferAttribute(CORNERS, 3))
  const buffer = new InstancedInterleavedBuffer(points, stride, 1)
  geometry.setAttribute('from', new InterleavedBufferAttribute(buffer, 3, 0))
  geometry.setAttribute('to', new InterleavedBufferAttribute(buffer, 3, 3))
  return drawn(geometry, side => material(shared, VERTEX, FRAGMENT, side, {
    near: { value: new Color() }, far: { value: new Color() }, width: { value: style.width }, count: { value: Math.max(1, count) },
    turns: { value: style.turns !== false }, strength: { value: side === 1 ? style.front : style.behind },
    firstShare: { value: 0 }, lastShare: { value: 1 }, until: { value: 2 },
  }), order)
}

/** A filled cap inside a rim around a pole. */
export function cap(shared: SharedUniforms, pole: 1 | -1, rim: readonly number[], order: number): Drawn {
  const corners: number[] = []
  for (let k = 0; k + 5 < rim.length; k += 3) corners.push(0, 0, pole, ...rim.slice(k, k + 6))
  const geometry = new BufferGeometry()
  geometry.setAttribute('position', new Float32BufferAttribute(corners, 3))
  return drawn(geometry, side => material(shared, CAP_VERTEX, CAP_FRAGMENT, side, { near: { value: new Color() }, strength: { value: side === 1 ? 0.9 : 0.3 } }), order)
}
