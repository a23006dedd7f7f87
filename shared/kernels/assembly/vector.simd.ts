// Four trials side by side: one trial a lane, 128-bit SIMD.
export type F = v128
export type U = v128
export const LANES: i32 = 4

@inline export function splat(x: f32): F { return f32x4.splat(x) }
@inline export function loadF(p: usize): F { return v128.load(p) }
@inline export function storeF(p: usize, x: F): void { v128.store(p, x) }
@inline export function add(a: F, b: F): F { return f32x4.add(a, b) }
@inline export function sub(a: F, b: F): F { return f32x4.sub(a, b) }
@inline export function mul(a: F, b: F): F { return f32x4.mul(a, b) }
@inline export function div(a: F, b: F): F { return f32x4.div(a, b) }
@inline export function sqrt(a: F): F { return f32x4.sqrt(a) }
@inline export function larger(a: F, b: F): F { return f32x4.max(a, b) }
@inline export function le(a: F, b: F): U { return f32x4.le(a, b) }
@inline export function gt(a: F, b: F): U { return f32x4.gt(a, b) }
@inline export function pick(mask: U, a: F, b: F): F { return v128.bitselect(a, b, mask) }
@inline export function any(mask: U): bool { return v128.any_true(mask) }
@inline export function asF(u: U): F { return u }
@inline export function asU(f: F): U { return f }
@inline export function fromInt(u: U): F { return f32x4.convert_i32x4_s(u) }
@inline export function splatU(x: u32): U { return i32x4.splat(x) }
@inline export function loadU(p: usize): U { return v128.load(p) }
@inline export function storeU(p: usize, x: U): void { v128.store(p, x) }
@inline export function addU(a: U, b: U): U { return i32x4.add(a, b) }
@inline export function subU(a: U, b: U): U { return i32x4.sub(a, b) }
@inline export function xor(a: U, b: U): U { return v128.xor(a, b) }
@inline export function and(a: U, b: U): U { return v128.and(a, b) }
@inline export function or(a: U, b: U): U { return v128.or(a, b) }
@inline export function shl(a: U, n: i32): U { return i32x4.shl(a, n) }
@inline export function shr(a: U, n: i32): U { return i32x4.shr_u(a, n) }
@inline export function sar(a: U, n: i32): U { return i32x4.shr_s(a, n) }
@inline export function loadSplat(p: usize): F { return v128.load32_splat(p) }
@inline export function loadSplatU(p: usize): U { return v128.load32_splat(p) }
