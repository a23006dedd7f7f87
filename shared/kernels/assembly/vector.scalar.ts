// One trial at a time, for engines without SIMD: the same operations in the same order, so the same bytes.
export type F = f32
export type U = u32
export const LANES: i32 = 1

@inline export function splat(x: f32): F { return x }
@inline export function loadF(p: usize): F { return f32.load(p) }
@inline export function storeF(p: usize, x: F): void { f32.store(p, x) }
@inline export function add(a: F, b: F): F { return a + b }
@inline export function sub(a: F, b: F): F { return a - b }
@inline export function mul(a: F, b: F): F { return a * b }
@inline export function div(a: F, b: F): F { return a / b }
@inline export function sqrt(a: F): F { return f32.sqrt(a) }
@inline export function larger(a: F, b: F): F { return f32.max(a, b) }
@inline export function le(a: F, b: F): U { return a <= b ? 0xFFFFFFFF : 0 }
@inline export function gt(a: F, b: F): U { return a > b ? 0xFFFFFFFF : 0 }
@inline export function pick(mask: U, a: F, b: F): F { return mask != 0 ? a : b }
@inline export function any(mask: U): bool { return mask != 0 }
@inline export function asF(u: U): F { return reinterpret<f32>(u) }
@inline export function asU(f: F): U { return reinterpret<u32>(f) }
@inline export function fromInt(u: U): F { return <f32>(<i32>u) }
@inline export function splatU(x: u32): U { return x }
@inline export function loadU(p: usize): U { return load<u32>(p) }
@inline export function storeU(p: usize, x: U): void { store<u32>(p, x) }
@inline export function addU(a: U, b: U): U { return a + b }
@inline export function subU(a: U, b: U): U { return a - b }
@inline export function xor(a: U, b: U): U { return a ^ b }
@inline export function and(a: U, b: U): U { return a & b }
@inline export function or(a: U, b: U): U { return a | b }
@inline export function shl(a: U, n: i32): U { return a << n }
@inline export function shr(a: U, n: i32): U { return a >> n }
@inline export function sar(a: U, n: i32): U { return <u32>(<i32>a >> n) }
@inline export function loadSplat(p: usize): F { return f32.load(p) }
@inline export function loadSplatU(p: usize): U { return load<u32>(p) }
