// One moment a lane, in the reduced units of shared/numerics/macrospin.ts and in single precision:
//   dm/ds = −[m × A + α m × (m × A)],  A = D m + h + ν + b p + a (m × p),  a = w·q0/max(q1 + q2 m·p, r1 + r2 m·p),  b = β a + c
// Classical fourth-order Runge–Kutta, ν held over the step and read in the Stratonovich sense.
//
// Noise: xoshiro128++ (Blackman & Vigna, ACM Trans. Math. Softw. 47, 36 (2021)), one stream a trial; three words a step, each
// turned into a normal number by the quantile function PPND7 of Wichura, AS 241, Applied Statistics 37, 477 (1988), which is exact
// to single precision down to 2⁻³³ (6.2σ).
//
// Memory (bytes from 0; every lane array holds LANES 32-bit values, 16 bytes apart):
//   0  x, 16 y, 32 z | 48 s0, 64 s1, 80 s2, 96 s3 | 112 crossing step (i32, −1 none) | 128 crossing fraction | 144 trial (u32)
//   160 decision of settling (i32: 0 open, 2n + 1 near or 2n far after n steps) | 192 parameters (f32), see PARAMETERS | 4096 table of stages, see ROW
import { F, U, LANES, splat, loadSplat, loadSplatU, loadF, storeF, add, sub, mul, div, sqrt, larger, le, gt, pick, any, asF, asU, fromInt, splatU, loadU, storeU, addU, subU, xor, and, or, shl, shr, sar } from './vector'

const X: usize = 0, Y: usize = 16, Z: usize = 32, S0: usize = 48, S1: usize = 64, S2: usize = 80, S3: usize = 96
const CROSS: usize = 112, FRACTION: usize = 128, TRIAL: usize = 144, DECISION: usize = 160
// PARAMETERS: α, unused, unused, unused, hx, hy, hz, px, py, pz, unused, angular (1 where the torque depends on the angle), β, side,
// near level, far level; then key0, key1 (u32)
const PARAMETERS: usize = 192, STAGES: usize = 320
const AX: usize = 384, AY: usize = 400, AZ: usize = 416, SX: usize = 432, SY: usize = 448, SZ: usize = 464
export const TABLE: usize = 4096
// ROW of a stage: a and b, or w·q0 and c where the torque depends on the angle; dy − dx, dz − dx; √(noise/h), standard deviation of each
// component of the thermal field, and the variance of z over a step at the equator (read from the middle of a step); q1, q2, r1, r2
const ROW: usize = 48

// Constants are read from memory: engines build a vector constant in several slow instructions each time it is met.
const CONSTANTS: usize = memory.data<f32>([0.70710678, 1, 7.0376836292e-2, -1.1514610310e-1, 1.1676998740e-1, -1.2420140846e-1, 1.4249322787e-1, -1.6668057665e-1, 2.0000714765e-1, -2.4999993993e-1, 3.3333331174e-1, -2.12194440e-4, 0.5, 0.693359375, 2.3283064365386963e-10, 0.180625, 59.109374720, 159.29113202, 50.434271938, 3.3871327179, 67.187563600, 78.757757664, 17.895169469, 0, 1.6, 0.17023821103, 1.3067284816, 2.7568153900, 1.4234372777, 0.12021132975, 0.73700164250, 0.425])
const MASKS: usize = memory.data<u32>([126, 0x007FFFFF, 0x3F000000, 0x7FFFFFFF, 0x80000000])

@inline function constant(k: usize): F { return loadSplat(CONSTANTS + 4 * k) }
@inline function constantU(k: usize): U { return loadSplatU(MASKS + 4 * k) }

@inline function parameter(k: usize): F { return loadSplat(PARAMETERS + 4 * k) }

@inline function rotl(a: U, n: i32): U { return or(shl(a, n), shr(a, 32 - n)) }

// Natural logarithm of positive normal numbers below 1: Moshier, Cephes, logf.
@inline function log(p: F): F {
  let bits = asU(p)
  let e = subU(shr(bits, 23), constantU(0))
  let m = asF(or(and(bits, constantU(1)), constantU(2)))
  let small = le(m, constant(0))
  e = addU(e, small)
  let x = sub(add(m, asF(and(asU(m), small))), constant(1))
  let z = mul(x, x)
  let y = constant(2)
  y = add(mul(y, x), constant(3))
  y = add(mul(y, x), constant(4))
  y = add(mul(y, x), constant(5))
  y = add(mul(y, x), constant(6))
  y = add(mul(y, x), constant(7))
  y = add(mul(y, x), constant(8))
  y = add(mul(y, x), constant(9))
  y = add(mul(y, x), constant(10))
  y = mul(mul(y, x), z)
  let n = fromInt(e)
  y = add(y, mul(n, constant(11)))
  y = sub(y, mul(z, constant(12)))
  return add(add(x, y), mul(n, constant(13)))
}

// Standard normal number from 32 random bits, read as a signed integer s: p = (s + ½)/2³² + ½.
@inline function normal(word: U): F {
  let sign = sar(word, 31)
  let magnitude = xor(word, sign)
  let q = mul(add(fromInt(magnitude), constant(12)), constant(14))
  let p = mul(add(fromInt(subU(constantU(3), magnitude)), constant(12)), constant(14))
  let r = sub(constant(15), mul(q, q))
  let a = mul(q, add(mul(add(mul(add(mul(constant(16), r), constant(17)), r), constant(18)), r), constant(19)))
  let b = add(mul(add(mul(add(mul(constant(20), r), constant(21)), r), constant(22)), r), constant(1))
  let t = sub(sqrt(sub(constant(23), log(p))), constant(24))
  let c = add(mul(add(mul(add(mul(constant(25), t), constant(26)), t), constant(27)), t), constant(28))
  let d = add(mul(add(mul(constant(29), t), constant(30)), t), constant(1))
  let central = le(q, constant(31))
  let value = div(pick(central, a, c), pick(central, b, d))
  return asF(xor(asU(value), and(sign, constantU(4))))
}

// exp(−x), x ≥ 0, by halving the argument and Taylor's series; in double precision.
function expMinus(x: f64): f64 {
  let r = -x / 64
  let sum: f64 = 1
  for (let n = 12; n >= 1; n--) sum = 1 + sum * r / <f64>n
  for (let k = 0; k < 6; k++) sum *= sum
  return sum
}

// First word of Philox4x32-10 (Salmon et al., SC11, 2011) at counter (step, 2, trial, 0): the uniform that decides whether a path
// which is near at both ends of a step has touched the equator in between.
function crossingWord(step: u32, trial: u32): u32 {
  let x0 = step, x1: u32 = 2, x2 = trial, x3: u32 = 0
  let k0 = load<u32>(PARAMETERS + 64), k1 = load<u32>(PARAMETERS + 68)
  for (let round = 0; round < 10; round++) {
    let a = <u64>x0 * 0xD2511F53, b = <u64>x2 * 0xCD9E8D57
    x0 = <u32>(b >> 32) ^ x1 ^ k0
    x1 = <u32>b
    x2 = <u32>(a >> 32) ^ x3 ^ k1
    x3 = <u32>a
    k0 += 0x9E3779B9
    k1 += 0xBB67AE85
  }
  return x0
}

/**
 * Takes steps `from` … `to` − 1 of a stretch.
 * @param h step in reduced time
 * @param crossings 1: look for crossings of the equator
 * @param table byte address of the stages' rows, two a step and one more at the end
 * @param moving 1 where they change from stage to stage, 0 where one stage serves all
 * @param first number of the stretch's first step since the trial began
 * @param settling 1: only until every lane has decided for a well
 * @returns the step reached
 */
export function steps(from: i32, to: i32, h: f32, crossings: i32, table: usize, moving: i32, first: i32, settling: i32): i32 {
  const angular = f32.load(PARAMETERS + 44) != 0, tilted = f32.load(PARAMETERS + 28) != 0 || f32.load(PARAMETERS + 32) != 0
  // Runge–Kutta nodes and weights of the four stages, times h.
  f32.store(STAGES, 0)
  f32.store(STAGES + 4, h * 0.5)
  f32.store(STAGES + 8, h * 0.5)
  f32.store(STAGES + 12, h)
  f32.store(STAGES + 16, h / 6)
  f32.store(STAGES + 20, h / 3)
  f32.store(STAGES + 24, h / 3)
  f32.store(STAGES + 28, h / 6)
  const side = parameter(13)
  let open = sar(loadU(CROSS), 31)
  let k = from
  for (; k < to; k++) {
    const row = table + (moving != 0 ? ROW * 2 * <usize>k : 0)
    const middle = moving != 0 ? row + ROW : row
    let scale = loadSplat(middle + 16)
    let s0 = loadU(S0), s1 = loadU(S1), s2 = loadU(S2), s3 = loadU(S3)
    // Three words, three normal numbers.
    let word = addU(rotl(addU(s0, s3), 7), s0), t = shl(s1, 9)
    s2 = xor(s2, s0); s3 = xor(s3, s1); s1 = xor(s1, s2); s0 = xor(s0, s3); s2 = xor(s2, t); s3 = rotl(s3, 11)
    storeF(AX, add(parameter(4), mul(scale, normal(word))))
    word = addU(rotl(addU(s0, s3), 7), s0); t = shl(s1, 9)
    s2 = xor(s2, s0); s3 = xor(s3, s1); s1 = xor(s1, s2); s0 = xor(s0, s3); s2 = xor(s2, t); s3 = rotl(s3, 11)
    storeF(AY, add(parameter(5), mul(scale, normal(word))))
    word = addU(rotl(addU(s0, s3), 7), s0); t = shl(s1, 9)
    s2 = xor(s2, s0); s3 = xor(s3, s1); s1 = xor(s1, s2); s0 = xor(s0, s3); s2 = xor(s2, t); s3 = rotl(s3, 11)
    storeF(AZ, add(parameter(6), mul(scale, normal(word))))
    storeU(S0, s0)
    storeU(S1, s1)
    storeU(S2, s2)
    storeU(S3, s3)
    let kx = splat(0), ky = splat(0), kz = splat(0)
    storeF(SX, loadF(X))
    storeF(SY, loadF(Y))
    storeF(SZ, loadF(Z))
    for (let stage = 0; stage < 4; stage++) {
      const node = loadSplat(STAGES + <usize>(4 * stage))
      const ux = add(loadF(X), mul(node, kx)), uy = add(loadF(Y), mul(node, ky)), uz = add(loadF(Z), mul(node, kz))
      const at = row + (moving != 0 ? ROW * <usize>((stage + 1) >> 1) : 0)
      let a = loadSplat(at), b = loadSplat(at + 4)
      if (angular) {
        const cosine = add(add(mul(ux, parameter(7)), mul(uy, parameter(8))), mul(uz, parameter(9)))
        a = div(a, larger(add(loadSplat(at + 24), mul(loadSplat(at + 28), cosine)), add(loadSplat(at + 32), mul(loadSplat(at + 36), cosine))))
        b = add(mul(parameter(12), a), b)
      }
      const pz = parameter(9)
      const alongZ = mul(a, pz)
      let fx = add(loadF(AX), mul(alongZ, uy))
      let fy = sub(add(loadF(AY), mul(loadSplat(at + 8), uy)), mul(alongZ, ux))
      let fz = add(add(loadF(AZ), mul(loadSplat(at + 12), uz)), mul(b, pz))
      if (tilted) {
        const px = parameter(7), py = parameter(8), alongX = mul(a, px), alongY = mul(a, py)
        fx = add(fx, sub(mul(b, px), mul(alongY, uz)))
        fy = add(fy, add(mul(b, py), mul(alongX, uz)))
        fz = add(fz, sub(mul(alongY, ux), mul(alongX, uy)))
      }
      const cx = sub(mul(uz, fy), mul(uy, fz)), cy = sub(mul(ux, fz), mul(uz, fx)), cz = sub(mul(uy, fx), mul(ux, fy))
      const alpha = parameter(0)
      kx = add(cx, mul(alpha, sub(mul(uy, cz), mul(uz, cy))))
      ky = add(cy, mul(alpha, sub(mul(uz, cx), mul(ux, cz))))
      kz = add(cz, mul(alpha, sub(mul(ux, cy), mul(uy, cx))))
      const weight = loadSplat(STAGES + <usize>(16 + 4 * stage))
      storeF(SX, add(loadF(SX), mul(weight, kx)))
      storeF(SY, add(loadF(SY), mul(weight, ky)))
      storeF(SZ, add(loadF(SZ), mul(weight, kz)))
    }
    const before = mul(side, loadF(Z))
    const sx = loadF(SX), sy = loadF(SY), sz = loadF(SZ)
    const norm = div(splat(1), sqrt(add(add(mul(sx, sx), mul(sy, sy)), mul(sz, sz))))
    storeF(X, mul(sx, norm))
    storeF(Y, mul(sy, norm))
    const z = mul(sz, norm)
    storeF(Z, z)
    const after = mul(side, z)
    if (crossings != 0) {
      const spread = f32.load(middle + 20)
      // Lanes that have not crossed (−1) and are at or beyond the equator, or close enough to have touched it inside the step.
      let reach = pick(le(after, splat(0)), splat(1), sub(splat(18 * spread), mul(before, after)))
      if (any(and(open, gt(reach, splat(0))))) {
        storeF(SX, before)
        storeF(SY, after)
        for (let lane: usize = 0; lane < <usize>LANES; lane++) {
          if (i32.load(CROSS + 4 * lane) != -1) continue
          let b = f32.load(SX + 4 * lane), a = f32.load(SY + 4 * lane)
          if (a <= 0) {
            let start = max<f32>(b, 0)
            i32.store(CROSS + 4 * lane, first + k)
            f32.store(FRACTION + 4 * lane, start / (start - a))
          }
          else {
            let exponent = 2 * <f64>b * <f64>a / <f64>spread
            if (exponent < 36 && (<f64>crossingWord(first + k, load<u32>(TRIAL + 4 * lane)) + 0.5) * 2.3283064365386963e-10 < expMinus(exponent)) {
              i32.store(CROSS + 4 * lane, first + k)
              f32.store(FRACTION + 4 * lane, b / (b + a))
            }
          }
        }
        open = sar(loadU(CROSS), 31)
      }
    }
    if (settling != 0) {
      const decision = loadU(DECISION)
      const reached = or(and(gt(after, parameter(14)), splatU(2 * (first + k) + 3)), and(gt(sub(splat(0), after), parameter(15)), splatU(2 * (first + k) + 2)))
      const now = or(decision, and(le(fromInt(decision), splat(0)), reached))
      storeU(DECISION, now)
      if (!any(le(fromInt(now), splat(0)))) return k + 1
    }
  }
  return k
}

/** Fills LANES·count normal numbers from the streams to `target`, lane by lane in turn: for tests of the transform. */
export function normals(target: usize, count: i32): void {
  let s0 = loadU(S0), s1 = loadU(S1), s2 = loadU(S2), s3 = loadU(S3)
  for (let n = 0; n < count; n++) {
    let word = addU(rotl(addU(s0, s3), 7), s0), t = shl(s1, 9)
    s2 = xor(s2, s0); s3 = xor(s3, s1); s1 = xor(s1, s2); s0 = xor(s0, s3); s2 = xor(s2, t); s3 = rotl(s3, 11)
    storeF(target + <usize>(4 * LANES * n), normal(word))
  }
  storeU(S0, s0)
  storeU(S1, s1)
  storeU(S2, s2)
  storeU(S3, s3)
}

/** The normal number of one word, in every lane: for tests of the transform's tails. */
export function normalOf(word: u32): f32 {
  storeF(X, normal(splatU(word)))
  return f32.load(X)
}
