import { SCALAR_KERNEL, SIMD_KERNEL } from './generated'

/** What the macrospin kernel exports; see assembly/macrospin.ts for the layout of its memory. */
export interface KernelExports {
  steps: (from: number, to: number, h: number, crossings: number, table: number, moving: number, first: number, settling: number) => number
  normals: (target: number, count: number) => void
  normalOf: (word: number) => number
}

/** One instance with its memory. */
export interface Kernel extends KernelExports {
  kind: KernelKind
  lanes: 1 | 4
  memory: WebAssembly.Memory
}

export type KernelKind = 'simd' | 'scalar'

const bytesOf = (base64: string): Uint8Array<ArrayBuffer> => Uint8Array.from(atob(base64), c => c.charCodeAt(0))

const modules = new Map<KernelKind, WebAssembly.Module>()

/** SIMD where the engine accepts the SIMD binary, the scalar one elsewhere; both give the same bytes. */
export const bestKernelKind = (): KernelKind => WebAssembly.validate(bytesOf(SIMD_KERNEL)) ? 'simd' : 'scalar'

/** A fresh instance of the kernel with memory of its own. */
export function openKernel(kind: KernelKind = bestKernelKind()): Kernel {
  const module = modules.get(kind) ?? new WebAssembly.Module(bytesOf(kind === 'simd' ? SIMD_KERNEL : SCALAR_KERNEL))
  modules.set(kind, module)
  const memory = new WebAssembly.Memory({ initial: 2, maximum: 4096 })
  const abort = () => {
    throw new RangeError('the kernel stopped')
  }
  const { exports } = new WebAssembly.Instance(module, { env: { memory, abort } })
  return { ...(exports as unknown as KernelExports), kind, lanes: kind === 'simd' ? 4 : 1, memory }
}
