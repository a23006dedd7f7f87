import { randomUUID } from 'node:crypto'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { jobDetailSchema, problemSchema } from '#shared/schemas/api'
import { jobListSchema } from '#shared/schemas/jobList'
import type { PresetCreate, PresetEdit } from '#shared/schemas/presets'
import { presetListSchema, presetSchema, presetVersionListSchema } from '#shared/schemas/presets'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { newId } from '../../server/models/id'
import { jobExportSchema } from '../../server/utils/exportTables'
import { addUser, addressOf } from '../support/people'
import type { Client } from './harness'
import { finished, openTestDatabase, signIn, switchingSpec } from './harness'

let db: Database
let owner: Client
let colleague: Client
let student: Client
let admin: Client
beforeAll(async () => {
  db = openTestDatabase()
  owner = await signIn('researcher')
  colleague = await signIn('colleague@example.org')
  student = await signIn('student')
  admin = await signIn('admin')
})
afterAll(() => closeDatabase(db))

const { device } = switchingSpec()
const body = (name: string, more: Partial<PresetCreate> = {}): PresetCreate => ({ name, content: { device }, ...more })
const list = async (client: Client, query = '') => presetListSchema.parse(await (await client.get(`/api/presets${query}`)).json()).presets
const make = async (name: string, more: Partial<PresetCreate> = {}) => presetSchema.parse(await (await owner.post('/api/presets', body(name, more))).json())
const edit = (client: Client, id: string, version: number, change: PresetEdit) => client.patch(`/api/presets/${id}`, change, { 'If-Match': `"${version}"` })
const versions = async (client: Client, id: string) => presetVersionListSchema.parse(await (await client.get(`/api/presets/${id}/versions`)).json()).versions
const damped = (damping: number) => ({ content: { device: { ...device, damping } } })

describe('presets', () => {
  it('hold the demo team’s cells, each a device as the bench takes it, at its first version', async () => {
    const presets = await list(student)
    expect(presets.map(preset => preset.name)).toEqual(expect.arrayContaining(['Q-28', 'M-45', 'V-24', 'K-32', 'S-30', 'T-28']))
    const cell = presets.find(preset => preset.name === 'Q-28')!
    expect(cell).toMatchObject({ shared: true, archived: false, version: 1 })
    expect((await versions(student, cell.id)).map(({ version, content }) => ({ version, content }))).toEqual([{ version: 1, content: cell.content }])
  })

  it('are saved as they are, and shared with the team alone', async () => {
    const name = '=HYPERLINK("x") <script>'
    const reply = await owner.post('/api/presets', { ...body(name), note: '  spare  ' })
    expect(reply.status).toBe(201)
    expect(reply.headers.get('etag')).toBe('"1"')
    const made = presetSchema.parse(await reply.json())
    expect(reply.headers.get('location')).toBe(`/api/presets/${made.id}`)
    expect(made).toMatchObject({ name, note: 'spare', own: true, shared: true, version: 1, content: { device } })
    expect((await list(student)).find(preset => preset.id === made.id)).toMatchObject({ own: false })
    const stranger = await signIn(addressOf(await addUser(db)))
    expect(await list(stranger, '?archived=1')).toEqual([])
    for (const ask of [stranger.get(`/api/presets/${made.id}`), stranger.get(`/api/presets/${made.id}/versions`), stranger.post(`/api/presets/${made.id}/archive`), edit(stranger, made.id, 1, { name: 'mine' })]) {
      expect((await ask).status).toBe(404)
    }
  })

  it('need a name and a device, and take nothing else', async () => {
    const made = await make('strict')
    for (const bad of [{}, body(''), body('x'.repeat(61)), { ...body('a'), ownerId: 'me' }, { name: 'a', content: {} }]) {
      expect((await owner.post('/api/presets', bad)).status).toBe(422)
    }
    for (const bad of [{ name: '' }, { version: 9 }, { archived: true }, { content: {} }]) {
      expect((await owner.patch(`/api/presets/${made.id}`, bad, { 'If-Match': '"1"' })).status).toBe(422)
    }
    expect((await owner.get('/api/presets?archived=0')).status).toBe(422)
  })

  it('that are kept private exist for their owner alone, also for an admin, until they are shared', async () => {
    const made = await make('private', { shared: false })
    expect((await list(owner)).map(preset => preset.id)).toContain(made.id)
    for (const other of [colleague, student, admin]) {
      expect((await list(other, '?archived=1')).map(preset => preset.id)).not.toContain(made.id)
      expect((await other.get(`/api/presets/${made.id}`)).status).toBe(404)
      expect((await other.get(`/api/presets/${made.id}/versions`)).status).toBe(404)
    }
    expect((await edit(admin, made.id, 1, { shared: true })).status).toBe(404)
    expect(presetSchema.parse(await (await edit(owner, made.id, 1, { shared: true })).json())).toMatchObject({ shared: true, version: 1 })
    expect((await student.get(`/api/presets/${made.id}`)).status).toBe(200)
    expect((await edit(admin, made.id, 1, { shared: false })).status).toBe(403)
  })

  it('leave their lists when archived and come back as they were', async () => {
    const made = await make('put away')
    expect((await colleague.post(`/api/presets/${made.id}/archive`)).status).toBe(403)
    expect((await student.post(`/api/presets/${made.id}/archive`)).status).toBe(403)
    expect(presetSchema.parse(await (await owner.post(`/api/presets/${made.id}/archive`)).json())).toMatchObject({ archived: true })
    expect((await list(colleague)).map(preset => preset.id)).not.toContain(made.id)
    expect((await list(colleague, '?archived=1')).find(preset => preset.id === made.id)).toMatchObject({ archived: true })
    expect((await edit(owner, made.id, 1, { note: 'late' })).status).toBe(409)
    expect((await admin.post(`/api/presets/${made.id}/restore`)).status).toBe(200)
    expect((await list(colleague)).find(preset => preset.id === made.id)).toMatchObject({ archived: false, version: 1, content: made.content })
  })
})

describe('versions of a preset', () => {
  it('are kept with what they said, who wrote them and when; sharing makes none, nor does a change to nothing', async () => {
    const made = await make('kept')
    const second = presetSchema.parse(await (await edit(owner, made.id, 1, { ...damped(0.03), note: 'more damping' })).json())
    expect(second).toMatchObject({ version: 2, note: 'more damping', name: 'kept', content: { device: { damping: 0.03 } } })
    const third = await edit(admin, made.id, 2, { name: 'kept by Petra' })
    expect(third.headers.get('etag')).toBe('"3"')
    expect(presetSchema.parse(await (await edit(owner, made.id, 3, { shared: false })).json()).version).toBe(3)
    expect(presetSchema.parse(await (await edit(owner, made.id, 3, { name: 'kept by Petra', ...damped(0.03) })).json()).version).toBe(3)
    const kept = await versions(owner, made.id)
    expect(kept.map(({ version, name, note, content }) => [version, name, note, content.device.damping])).toEqual([
      [3, 'kept by Petra', 'more damping', 0.03], [2, 'kept', 'more damping', 0.03], [1, 'kept', '', device.damping],
    ])
    expect(kept[0]!.by.id).not.toBe(kept[1]!.by.id)
    expect(kept[1]!.by.id).toBe(made.owner.id)
  })

  it('are asked for by every change: 428 without, 412 with what stands there now for another', async () => {
    const made = await make('guarded')
    expect((await owner.patch(`/api/presets/${made.id}`, { note: 'x' })).status).toBe(428)
    await edit(owner, made.id, 1, { note: 'first' })
    for (const tag of ['"1"', '"3"', '*', '2', 'W/"2"', '"2", "3"']) {
      const reply = await owner.patch(`/api/presets/${made.id}`, { note: 'second' }, { 'If-Match': tag })
      expect(reply.status, tag).toBe(412)
      const problem = problemSchema.parse(await reply.json())
      expect(problem.type).toBe('precondition-failed')
      expect(problem.current).toMatchObject({ id: made.id, version: 2, note: 'first' })
    }
    expect((await versions(owner, made.id)).length).toBe(2)
  })

  it('have one winner when many are written at once', async () => {
    const made = await make('raced')
    const replies = await Promise.all(Array.from({ length: 12 }, (_, k) => edit(k % 2 ? owner : admin, made.id, 1, { note: `writer ${k}` })))
    expect(replies.map(reply => reply.status).sort()).toEqual([200, ...Array.from({ length: 11 }, () => 412)])
    const winner = presetSchema.parse(await replies.find(reply => reply.status === 200)!.json())
    expect((await versions(owner, made.id)).map(({ version, note }) => [version, note])).toEqual([[2, winner.note], [1, '']])
  })
})

describe('a job', () => {
  const queue = (client: Client, query: string, spec = switchingSpec({ trials: 20 }), key: string = randomUUID()) => client.post(`/api/jobs${query}`, spec, { 'Idempotency-Key': key })

  it('pins the version of the preset that it used, and says whether its device differs from it', async () => {
    const made = await make('pinned')
    await edit(owner, made.id, 1, { ...damped(0.07), name: 'pinned later' })
    const plain = jobDetailSchema.parse(await (await queue(colleague, `?preset=${made.id}&version=1`)).json())
    expect(plain.preset).toEqual({ id: made.id, name: 'pinned', version: 1, changed: false })
    const differs = jobDetailSchema.parse(await (await queue(owner, `?preset=${made.id}&version=2`)).json())
    expect(differs.preset).toEqual({ id: made.id, name: 'pinned later', version: 2, changed: true })
    const spec = switchingSpec({ trials: 20 })
    const same = await queue(owner, `?preset=${made.id}&version=2`, { ...spec, device: { ...spec.device, damping: 0.07 * (1 + 1e-12) } })
    expect(jobDetailSchema.parse(await same.json()).preset).toMatchObject({ version: 2, changed: false })
    const { jobs } = jobListSchema.parse(await (await student.get('/api/jobs')).json())
    expect(jobs.find(job => job.id === plain.id)!.preset).toEqual(plain.preset)
    expect(jobDetailSchema.parse(await (await queue(owner, '')).json()).preset).toBeNull()
    await finished(owner, differs.id)
    const exported = jobExportSchema.parse(await (await student.get(`/api/jobs/${differs.id}/export.json`)).json())
    expect(exported.job.preset).toEqual(differs.preset)
    expect(await (await student.get(`/api/jobs/${differs.id}/export.csv?table=summary`)).text()).toContain('"pinned later, version 2, changed"')
  })

  it('pins nothing that its owner does not have, no version that there is not, and nothing by halves', async () => {
    const made = await make('withheld', { shared: false })
    for (const query of [`?preset=${made.id}&version=1`, `?preset=${newId()}&version=1`]) {
      const reply = await queue(colleague, query)
      expect(reply.status).toBe(422)
      expect(problemSchema.parse(await reply.json()).errors).toEqual([{ pointer: '/preset', detail: 'There is no such preset for you.' }])
    }
    const reply = await queue(owner, `?preset=${made.id}&version=2`)
    expect(problemSchema.parse(await reply.json()).errors).toMatchObject([{ pointer: '/version' }])
    for (const query of [`?preset=${made.id}`, '?version=1', `?preset=${made.id}&version=0`, `?preset=${made.id}&version=1&version=1`, `?preset=${made.id}&version=1e3`]) {
      expect((await queue(owner, query)).status, query).toBe(422)
    }
    expect((await queue(owner, `?preset=${made.id}&version=1`)).status).toBe(201)
  })

  it('repeated under its key is the same job only with the same pin', async () => {
    const made = await make('repeated')
    const key = randomUUID()
    const pin = `?preset=${made.id}&version=1`
    const first = jobDetailSchema.parse(await (await queue(owner, pin, undefined, key)).json())
    const again = await queue(owner, pin, undefined, key)
    expect(again.headers.get('idempotency-replayed')).toBe('true')
    expect(jobDetailSchema.parse(await again.json()).id).toBe(first.id)
    expect((await queue(owner, '', undefined, key)).status).toBe(422)
  })
})
