import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { presetListSchema, presetSchema } from '#shared/schemas/api'
import type { Database } from '../../server/models/database'
import { closeDatabase } from '../../server/models/database'
import { addUser, addressOf } from '../support/people'
import type { Client } from './harness'
import { openTestDatabase, signIn, switchingSpec } from './harness'

let db: Database
let owner: Client
beforeAll(async () => {
  db = openTestDatabase()
  owner = await signIn('researcher')
})
afterAll(() => closeDatabase(db))

const list = async (client: Client) => presetListSchema.parse(await (await client.get('/api/presets')).json()).presets
const body = (name: string) => ({ name, content: { device: switchingSpec().device } })

describe('presets', () => {
  it('hold the demo team’s cells, each a device as the bench takes it', async () => {
    const names = (await list(await signIn('student'))).map(preset => preset.name)
    expect(names).toEqual(expect.arrayContaining(['Q-28', 'M-45', 'V-24', 'K-32', 'S-30', 'T-28']))
  })

  it('are saved as they are, and shared with the team alone', async () => {
    const name = '=HYPERLINK("x") <script>'
    const reply = await owner.post('/api/presets', { ...body(name), note: '  spare  ' })
    expect(reply.status).toBe(201)
    const made = presetSchema.parse(await reply.json())
    expect(made).toMatchObject({ name, note: 'spare', own: true, content: { device: switchingSpec().device } })
    expect((await list(await signIn('student'))).find(preset => preset.id === made.id)).toMatchObject({ own: false })
    const stranger = await signIn(addressOf(await addUser(db)))
    expect(await list(stranger)).toEqual([])
    expect((await stranger.delete(`/api/presets/${made.id}`)).status).toBe(404)
    expect((await (await signIn('colleague@example.org')).delete(`/api/presets/${made.id}`)).status).toBe(403)
    expect((await owner.delete(`/api/presets/${made.id}`)).status).toBe(204)
    expect((await owner.delete(`/api/presets/${made.id}`)).status).toBe(404)
    expect((await list(owner)).map(preset => preset.id)).not.toContain(made.id)
  })

  it('need a name and a device, and take nothing else', async () => {
    for (const bad of [{}, body(''), body('x'.repeat(61)), { ...body('a'), ownerId: 'me' }, { name: 'a', content: {} }]) {
      expect((await owner.post('/api/presets', bad)).status).toBe(422)
    }
  })
})
