import { driftOf } from '#shared/numerics/macrospin'
import type { Dynamics } from '#shared/numerics/macrospin'

export type Vector = [number, number, number]
export type Scheme = (dynamics: Dynamics, m: Vector, h: number) => Vector

const cross = (a: Vector, b: Vector): Vector => [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
const add = (a: Vector, b: Vector, factor = 1): Vector => [a[0] + factor * b[0], a[1] + factor * b[1], a[2] + factor * b[2]]
const scaled = (a: Vector, factor: number): Vector => [factor * a[0], factor * a[1], factor * a[2]]
export const onSphere = (a: Vector): Vector => scaled(a, 1 / Math.hypot(...a))

const slopeOf = (dynamics: Dynamics) => {
  const drift = driftOf(dynamics)
  return (m: Vector): Vector => {
    const out: Vector = [0, 0, 0]
    drift(m, 1, out)
    return out
  }
}

/** ω = A + α m × A of dm/ds = ω × m. */
const turningOf = (dynamics: Dynamics) => {
  return (m: Vector): Vector => {
    const { diagonal, field, reference, torque, fieldLikeRatio, damping } = dynamics
    const a = torque.q0 / (torque.q1 + torque.q2 * (m[0] * reference[0] + m[1] * reference[1] + m[2] * reference[2]))
    const p: Vector = [...reference]
    const A = add(add(add([diagonal[0] * m[0], diagonal[1] * m[1], diagonal[2] * m[2]], [...field]), p, fieldLikeRatio * a), cross(m, p), a)
    return add(A, cross(m, A), damping)
  }
}

/** exp(v×) m, Rodrigues' formula. */
function rotate(v: Vector, m: Vector): Vector {
  const angle = Math.hypot(...v)
  if (angle === 0) return m
  const axis = scaled(v, 1 / angle)
  const along = axis[0] * m[0] + axis[1] * m[1] + axis[2] * m[2]
  return add(add(scaled(m, Math.cos(angle)), cross(axis, m), Math.sin(angle)), axis, along * (1 - Math.cos(angle)))
}

/** (1 − v×/2)⁻¹(1 + v×/2) m: the rotation that the midpoint rule makes. */
function cayley(v: Vector, m: Vector): Vector {
  const half = scaled(v, 0.5)
  const square = half[0] ** 2 + half[1] ** 2 + half[2] ** 2
  const u = add(m, cross(half, m))
  return add(m, cross(half, u), 2 / (1 + square))
}

/** One step without noise; with a thermal field held over the step where the caller adds one to the field. */
export const SCHEMES: Record<string, Scheme> = {
  'Heun': (dynamics, m, h) => {
    const slope = slopeOf(dynamics)
    const first = slope(m)
    return onSphere(add(m, add(first, slope(add(m, first, h))), h / 2))
  },
  'semi-implicit midpoint (Cayley)': (dynamics, m, h) => {
    const turning = turningOf(dynamics)
    const predicted = cayley(scaled(turning(m), h), m)
    return cayley(scaled(turning(scaled(add(m, predicted), 0.5)), h), m)
  },
  'Runge–Kutta 4': (dynamics, m, h) => {
    const slope = slopeOf(dynamics)
    const k1 = slope(m)
    const k2 = slope(add(m, k1, h / 2))
    const k3 = slope(add(m, k2, h / 2))
    const k4 = slope(add(m, k3, h))
    return onSphere(add(m, add(add(k1, k4), add(k2, k3), 2), h / 6))
  },
  // Celledoni, Marthinsen & Owren, Future Gener. Comput. Syst. 19, 341 (2003): commutator-free, fourth order.
  'Lie group 4, commutator-free': (dynamics, m, h) => {
    const turning = turningOf(dynamics)
    const k1 = turning(m)
    const second = rotate(scaled(k1, h / 2), m)
    const k2 = turning(second)
    const k3 = turning(rotate(scaled(k2, h / 2), m))
    const k4 = turning(rotate(add(scaled(k3, h), k1, -h / 2), second))
    const inner = scaled(add(add(add(scaled(k1, 3), k2, 2), k3, 2), k4, -1), h / 12)
    const outer = scaled(add(add(add(scaled(k1, -1), k2, 2), k3, 2), k4, 3), h / 12)
    return rotate(outer, rotate(inner, m))
  },
}
