import { describe, expect, it } from 'vitest'
import { idSchema } from '#shared/schemas/api'
import { MIGRATIONS } from '../../server/migrations'
import { newId } from '../../server/models/id'
import { presentJob } from '../../server/models/present'

describe('ids', () => {
  it('have the API’s shape, never repeat and sort as they were made', () => {
    const ids = Array.from({ length: 5000 }, () => newId())
    expect(ids.every(id => id.length === 26 && idSchema.safeParse(id).success)).toBe(true)
    expect(new Set(ids).size).toBe(5000)
    expect([...ids].sort()).toEqual(ids)
  })

  it('go on rising when the clock steps back', () => {
    const now = Date.now() + 1_000_000
    const first = newId(now)
    expect(newId(now - 3_600_000) > first).toBe(true)
  })
})

describe('migrations', () => {
  it('rise in number, none twice, and take one statement each way', () => {
    const numbers = MIGRATIONS.map(({ name }) => name.slice(0, 4))
    expect(numbers).toEqual([...new Set(numbers)].sort())
    for (const { name, up, down } of MIGRATIONS) {
      expect(name).toMatch(/^\d{4}-\w+$/)
      for (const sql of [up, down]) {
        expect(sql.trim()).toMatch(/^(CREATE|ALTER|DROP|INSERT|DELETE)\s/)
        expect(sql).not.toContain(';')
      }
    }
  })
})

describe('progress of a job', () => {
  const row = {
    id: newId(), state: 'running' as const, question: 'motion' as const, sentence: '', predictedCpuMicros: 2_500_000, cpuMicros: 0,
    chunksTotal: 4, chunksDone: 1, headline: null, error: null, createdAt: new Date(0), startedAt: null, finishedAt: null,
    presetId: null, presetVersion: null, presetName: null, presetChanged: null,
  }
  const owner = { id: newId(), name: 'Iris Vale' }

  it('counts chunks that are done and the running ones in part', () => {
    expect(presentJob(row, owner, 1.5).progress).toBe(0.625)
    expect(presentJob({ ...row, chunksDone: 4 }, owner, 0.5).progress).toBe(1)
    expect(presentJob({ ...row, state: 'done', chunksDone: 3 }, owner, 0).progress).toBe(1)
    expect(presentJob(row, owner, 0).predictedCpuSeconds).toBe(2.5)
  })
})
