import { z } from 'zod'

/** Queue of the chunks that wait for a free slot. */
export const CHUNK_QUEUE = 'chunks'
/** Prefix of all keys of the queue. */
export const QUEUE_PREFIX = 'farpole'

/** What a message carries: ids only; the rows hold the rest. */
export const chunkMessageSchema = z.strictObject({ chunkId: z.int().min(1), jobId: z.string().length(26) })
export type ChunkMessage = z.infer<typeof chunkMessageSchema>

/** A chunk and the fencing number that it had when its message was made. */
export interface Dispatched extends ChunkMessage { attempt: number }

/**
 * Id of a chunk's message. The fencing number is in it, so that a chunk handed out again after a loss is not taken for
 * the message that is still held by a dead worker. Neither digits only nor with a colon: the queue accepts no such ids.
 */
export const messageId = ({ chunkId, attempt }: Pick<Dispatched, 'chunkId' | 'attempt'>) => `chunk-${chunkId}-${attempt}`
