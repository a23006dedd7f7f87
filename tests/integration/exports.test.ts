import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { unpackArrays } from '#shared/utils/arrays'
import { specHash } from '#shared/physics/engine'
import { bringsPaths, type PathsLayout } from '#shared/schemas/answer'
import type { JobDetail } from '#shared/schemas/api'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { TABLE_NAMES, columnsSchema, jobExportSchema } from '../../server/utils/exportTables'
import type { TableName } from '../../server/utils/exportTables'
import type { Client } from './harness'
import { failureSpec, finished, motionSpec, openTestDatabase, signIn, submit, switchingSpec } from './harness'

let db: Database
let client: Client
let switching: JobDetail
let motion: JobDetail
let failure: JobDetail

beforeAll(async () => {
  db = openTestDatabase()
  const researcher = await signIn('researcher')
  const spec = switchingSpec({ trials: 300, seed: 3 })
  const inert = await submit(researcher, { ...spec, device: { ...spec.device, label: '=1+1", “x”' } })
  const moving = await submit(researcher, motionSpec({ paths: 2 }))
  const counted = await submit(researcher, failureSpec({ trials: 50 }))
  switching = await finished(researcher, inert.id)
  motion = await finished(researcher, moving.id)
  failure = await finished(researcher, counted.id)
  client = await signIn('student')
})
afterAll(() => closeDatabase(db))

function pathsOf({ answer }: JobDetail): PathsLayout {
  if (!bringsPaths(answer)) throw new Error('no answer with paths')
  return answer.paths
}

async function table(job: JobDetail, name: TableName) {
  const reply = await client.get(`/api/jobs/${job.id}/export.csv?table=${name}`)
  expect(reply.status).toBe(200)
  expect(reply.headers.get('content-type')).toContain('text/csv')
  expect(reply.headers.get('content-disposition')).toBe(`attachment; filename="farpole-${job.id}-${name}.csv"`)
  const text = await reply.text()
  expect(text.endsWith('\r\n')).toBe(true)
  const lines = text.trimEnd().split('\r\n')
  return { text, header: lines[0]!.split(','), rows: lines.slice(1) }
}

describe('CSV', () => {
  it('has the survival curve, the histogram and the times of the answer', async () => {
    if (switching.answer?.kind !== 'switching') throw new Error('not a switching answer')
    const { survival, histogram, time } = switching.answer
    const curve = await table(switching, 'survival')
    expect(curve.rows).toHaveLength(survival.time.length)
    expect(curve.rows.map(row => Number(row.split(',')[1]))).toEqual(survival.value)
    const bins = await table(switching, 'histogram')
    expect(bins.rows.map(row => Number(row.split(',')[2]))).toEqual(histogram.counts)
    const times = (await table(switching, 'times')).rows.map(row => row.split(','))
    expect(times.map(row => Number(row[0]))).toEqual(Array.from({ length: 300 }, (_, k) => k))
    const crossed = times.filter(row => row[1] !== '').map(row => Number(row[1]))
    expect(crossed).toHaveLength(time.crossed)
    expect(crossed.reduce((sum, t) => sum + t, 0) / crossed.length * 1e-9).toBeCloseTo(time.mean!.value, 15)
    expect(times.filter(row => row[3] === '1')).toHaveLength(switching.answer.failures.afterSettling.count)
  })

  it('has the solved write errors and the trials that check them', async () => {
    const { answer } = failure
    if (answer?.kind !== 'failure' || answer.solution.kind !== 'solved') throw new Error('nothing was solved')
    expect(answer.complete).toBe(true)
    const errors = await table(failure, 'errors')
    expect(errors.rows.map(row => Number(row.split(',')[1]))).toEqual(answer.solution.value)
    const checks = await table(failure, 'checks')
    expect(checks.rows.map(row => row.split(',').slice(0, 3).map(Number))).toEqual(answer.checks.map(check => [expect.closeTo(check.width * 1e9, 9), 50, check.failures.afterSettling.count]))
  })

  it('has every path with all its samples on the unit sphere', async () => {
    const layout = pathsOf(motion)
    const { rows } = await table(motion, 'paths')
    expect(rows).toHaveLength(layout.paths * layout.samples)
    for (const row of rows.filter((_, k) => k % 97 === 0)) {
      const [, , x, y, z] = row.split(',').map(Number) as [number, number, number, number, number]
      expect(Math.hypot(x, y, z)).toBeCloseTo(1, 5)
    }
  })

  it('keeps a name that a spreadsheet would run inert, and quotes it', async () => {
    const { text } = await table(switching, 'summary')
    expect(text).toContain('“x”')
    expect(text).not.toMatch(/(^|,|\r\n)"?[=+@]/)
  })

  it('comes with a description of exactly its columns, with UCUM units', async () => {
    for (const job of [switching, motion, failure]) {
      for (const name of TABLE_NAMES) {
        const reply = await client.get(`/api/jobs/${job.id}/export-columns.json?table=${name}`)
        if (reply.status === 404) {
          expect((await client.get(`/api/jobs/${job.id}/export.csv?table=${name}`)).status).toBe(404)
          continue
        }
        const { columns } = columnsSchema.parse(await reply.json())
        const { header, rows } = await table(job, name)
        expect(columns.map(column => column.header)).toEqual(header)
        if (name !== 'summary') expect(new Set(rows.map(row => row.split(',').length))).toEqual(new Set([header.length]))
        for (const { header: title, unit } of columns) if (unit) expect(title).toContain(`(${unit})`)
      }
    }
  })

  it('has no other tables, and none of a job without an answer', async () => {
    expect((await client.get(`/api/jobs/${motion.id}/export.csv?table=survival`)).status).toBe(404)
    for (const query of ['', '?table=users', '?table=paths&format=x', '?table=..%2F..%2Fetc']) {
      expect((await client.get(`/api/jobs/${motion.id}/export.csv${query}`)).status).toBe(422)
    }
    const owner = await signIn('researcher')
    const { id } = await submit(owner, switchingSpec({ trials: 900_000 }))
    await owner.post(`/api/jobs/${id}/cancel`)
    expect((await client.get(`/api/jobs/${id}/export.csv?table=summary`)).status).toBe(409)
    expect((await client.get(`/api/jobs/${id}/paths`)).status).toBe(409)
  })
})

describe('JSON and binary', () => {
  it('hold the specification, the answer and where it came from', async () => {
    const reply = await client.get(`/api/jobs/${switching.id}/export.json`)
    expect(reply.headers.get('content-disposition')).toMatch(/^attachment; filename="farpole-\w+\.json"$/)
    const file = jobExportSchema.parse(await reply.json())
    expect(file.spec).toEqual(switching.spec)
    expect(file.answer).toEqual(switching.answer)
    expect(file.specHash).toBe(specHash(file.spec))
    expect(file.job.owner.name).toBe(switching.owner.name)
  })

  it('give the paths as packed single-precision numbers of the announced layout', async () => {
    const reply = await client.get(`/api/jobs/${motion.id}/paths`)
    const { meta, arrays } = unpackArrays(new Uint8Array(await reply.arrayBuffer()))
    expect(meta).toEqual(pathsOf(motion))
    expect(arrays.paths).toBeInstanceOf(Float32Array)
    expect(arrays.paths).toHaveLength(3 * pathsOf(motion).paths * pathsOf(motion).samples)
  })
})
