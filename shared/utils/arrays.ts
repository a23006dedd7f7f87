type Packed = Float64Array | Float32Array | Uint8Array | Uint32Array
const TYPES = { f64: Float64Array, f32: Float32Array, u8: Uint8Array, u32: Uint32Array } as const
type TypeName = keyof typeof TYPES

const nameOf = (array: Packed): TypeName =>
  array instanceof Float64Array ? 'f64' : array instanceof Float32Array ? 'f32' : array instanceof Uint32Array ? 'u32' : 'u8'

const aligned = (offset: number) => Math.ceil(offset / 8) * 8

/**
 * Named typed arrays and a JSON value as one block of bytes: a 32-bit little-endian header length, the header as JSON
 * (meta, then name, type, length and byte offset of each array), the arrays at multiples of eight bytes, little-endian.
 */
export function packArrays(meta: unknown, arrays: Record<string, Packed>): Uint8Array {
  let offset = 0
  const layout = Object.entries(arrays).map(([name, array]) => {
    const entry = { name, type: nameOf(array), length: array.length, offset }
    offset = aligned(offset + array.byteLength)
    return entry
  })
  const header = new TextEncoder().encode(JSON.stringify({ meta, arrays: layout }))
  const start = aligned(4 + header.length)
  const bytes = new Uint8Array(start + offset)
  new DataView(bytes.buffer).setUint32(0, header.length, true)
  bytes.set(header, 4)
  for (const entry of layout) {
    const array = arrays[entry.name]!
    bytes.set(new Uint8Array(array.buffer, array.byteOffset, array.byteLength), start + entry.offset)
  }
  return bytes
}

/** Inverse of `packArrays`; the arrays are copies. Throws a RangeError or SyntaxError on bytes that are no such block. */
export function unpackArrays(bytes: Uint8Array): { meta: unknown, arrays: Record<string, Packed> } {
  const headerLength = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength).getUint32(0, true)
  const header = JSON.parse(new TextDecoder().decode(bytes.subarray(4, 4 + headerLength))) as { meta: unknown, arrays: { name: string, type: TypeName, length: number, offset: number }[] }
  const start = aligned(4 + headerLength)
  const arrays: Record<string, Packed> = {}
  for (const { name, type, length, offset } of header.arrays) {
    const Type = TYPES[type]
    const from = start + offset
    const end = from + length * Type.BYTES_PER_ELEMENT
    if (end > bytes.byteLength) throw new RangeError('packed arrays are cut short')
    // A Buffer's own slice is a view on its pool, not a copy.
    arrays[name] = new Type(Uint8Array.prototype.slice.call(bytes, from, end).buffer)
  }
  return { meta: header.meta, arrays }
}
