import { sha256 } from '@noble/hashes/sha2.js'
import { bytesToHex, utf8ToBytes } from '@noble/hashes/utils.js'
import type { JobSpec } from '../schemas/job'

/** Changes whenever the same specification and seed would give other bytes or another price. */
export const ENGINE_VERSION = '1.2.0'

/** JSON with sorted keys: one text for one value. −0 is written as 0. */
export function canonicalJson(value: unknown): string {
  if (Array.isArray(value)) return `[${value.map(canonicalJson).join(',')}]`
  if (value !== null && typeof value === 'object') {
    const entries = Object.entries(value).filter(([, v]) => v !== undefined).sort(([a], [b]) => a < b ? -1 : 1)
    return `{${entries.map(([key, v]) => `${JSON.stringify(key)}:${canonicalJson(v)}`).join(',')}}`
  }
  return JSON.stringify(value)
}

/** SHA-256, hex, of the whole specification: what provenance and exports quote. */
export const specHash = (spec: JobSpec): string => bytesToHex(sha256(utf8ToBytes(canonicalJson(spec))))

/**
 * Key of the trials' random streams: the seed and everything that changes the equation of motion. The cell's name, the
 * question and the number of trials are left out, so that more trials of the same point continue the same sequence.
 */
export function streamKey(spec: JobSpec): readonly [number, number] {
  const { device, environment, write, start, numerics } = spec
  const point = { device: { ...device, label: undefined }, environment, write, start, numerics }
  const digest = sha256(utf8ToBytes(canonicalJson(point)))
  const view = new DataView(digest.buffer, digest.byteOffset)
  return [view.getUint32(0), view.getUint32(4)]
}
