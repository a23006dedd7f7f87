import type { Device } from '../schemas/job'

type Leaf = string | number | boolean | null

const leaves = (value: object, prefix = ''): [string, Leaf][] => Object.entries(value).flatMap(([key, inner]: [string, unknown]): [string, Leaf][] =>
  typeof inner === 'object' && inner !== null ? leaves(inner, `${prefix}${key}.`) : inner === undefined ? [] : [[`${prefix}${key}`, inner as Leaf]])

/** Whether two values are the same to all figures that anybody types (eight). */
const sameLeaf = (a: Leaf | undefined, b: Leaf): boolean =>
  a === b || (typeof a === 'number' && typeof b === 'number' && Math.abs(a - b) <= 1e-8 * Math.max(Math.abs(a), Math.abs(b)))

/** Whether two devices are the same to all figures that anybody types. */
export function sameDevice(a: Device, b: Device): boolean {
  const left = leaves(a)
  const right = new Map(leaves(b))
  return left.length === right.size && left.every(([path, value]) => sameLeaf(right.get(path), value))
}

export interface DeviceChange { path: string, before: Leaf | undefined, after: Leaf | undefined }

/** Where two devices differ, by dotted path in the order of the newer one; undefined where only one of them has the value. SI. */
export function deviceChanges(before: Device, after: Device): DeviceChange[] {
  const old = new Map(leaves(before))
  const now = new Map(leaves(after))
  return [
    ...[...now].filter(([path, value]) => !sameLeaf(old.get(path), value)).map(([path, value]) => ({ path, before: old.get(path), after: value })),
    ...[...old].filter(([path]) => !now.has(path)).map(([path, value]) => ({ path, before: value, after: undefined })),
  ]
}
