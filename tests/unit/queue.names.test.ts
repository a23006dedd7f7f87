import { describe, expect, it } from 'vitest'
import { newId } from '../../server/models/id'
import { chunkMessageSchema, messageId } from '../../server/queue/names'

describe('Messages of the queue', () => {
  it('carry ids and nothing else', () => {
    const message = { chunkId: 7, jobId: newId() }
    expect(chunkMessageSchema.parse(message)).toEqual(message)
    expect(chunkMessageSchema.safeParse({ ...message, spec: {} }).success).toBe(false)
    expect(chunkMessageSchema.safeParse({ ...message, chunkId: '7' }).success).toBe(false)
    expect(chunkMessageSchema.safeParse({ ...message, chunkId: 0 }).success).toBe(false)
  })

  it('have ids that the queue accepts, another for each time a chunk is handed out', () => {
    const ids = [0, 1, 2].map(attempt => messageId({ chunkId: 12, attempt }))
    expect(new Set(ids).size).toBe(3)
    for (const id of ids) expect(id).toMatch(/^(?!\d+$)[^:]+$/)
  })
})
