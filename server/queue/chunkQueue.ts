import { Queue } from 'bullmq'
import type { Settings } from '#shared/schemas/settings'
import { producerConnection } from './connection'
import { CHUNK_QUEUE, QUEUE_PREFIX, messageId } from './names'
import type { ChunkMessage, Dispatched } from './names'

const PATIENCE_MS = 5000

/** The sending side of the queue of chunks. All of it fails within seconds while Redis is away. */
export interface ChunkQueue {
  /** Throws when Redis does not answer. */
  check: () => Promise<void>
  enqueue: (chunks: readonly Dispatched[]) => Promise<void>
  /** Those of `chunks` that the queue has no live message for; what is left of their messages is removed. */
  missing: (chunks: readonly Dispatched[]) => Promise<Dispatched[]>
  close: () => Promise<void>
}

/** Opens the queue; connects in the background and again whenever the connection is lost. `onError` hears of it. */
export function openChunkQueue(redis: Settings['redis'], onError: (error: Error) => void): ChunkQueue {
  const queue = new Queue<ChunkMessage, void, string, ChunkMessage, void, string>(CHUNK_QUEUE, {
    connection: producerConnection(redis),
    prefix: QUEUE_PREFIX,
    // A message that has ended says nothing that its row does not: it goes at once, so that its id is free again.
    defaultJobOptions: { removeOnComplete: true, removeOnFail: true, attempts: 1 },
    streams: { events: { maxLen: 100 } },
  })
  queue.on('error', onError)
  const live = async (chunk: Dispatched): Promise<boolean> => {
    const id = messageId(chunk)
    const state = await queue.getJobState(id)
    if (state !== 'unknown' && state !== 'completed' && state !== 'failed') return true
    await queue.remove(id)
    return false
  }
  return {
    check: () => patiently(queue.getJobCountByTypes('waiting').then(() => undefined)),
    enqueue: chunks => patiently(queue.addBulk(chunks.map(chunk => ({
      name: 'chunk', data: { chunkId: chunk.chunkId, jobId: chunk.jobId }, opts: { jobId: messageId(chunk) },
    }))).then(() => undefined)),
    missing: async (chunks) => {
      const alive = await patiently(Promise.all(chunks.map(live)))
      return chunks.filter((_, k) => !alive[k])
    },
    close: () => patiently(queue.close()),
  }
}

/** A connection that never came about leaves commands hanging: they are given up. */
function patiently<T>(work: Promise<T>): Promise<T> {
  let timer: NodeJS.Timeout | undefined
  const late = new Promise<never>((_, reject) => {
    timer = setTimeout(() => reject(new Error(`Redis did not answer within ${PATIENCE_MS} ms.`)), PATIENCE_MS)
  })
  return Promise.race([work, late]).finally(() => clearTimeout(timer))
}
