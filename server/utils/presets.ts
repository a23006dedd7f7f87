import { presetContentSchema } from '#shared/schemas/api'
import type { Preset } from '#shared/schemas/api'
import type { Database } from '../models/database'
import type { Preset as PresetRow } from '../models/records'
import type { Auth } from './auth'

/** Presets for one reader, in the order given. */
export async function presentPresets(db: Database, auth: Auth, rows: readonly PresetRow[]): Promise<Preset[]> {
  const owners = await db.models.User.findAll({ where: { id: [...new Set(rows.map(row => row.ownerId))] }, attributes: ['id', 'name'] })
  const names = new Map(owners.map(owner => [owner.id, owner.name]))
  return rows.map(row => ({
    id: row.id,
    name: row.name,
    note: row.note,
    owner: { id: row.ownerId, name: names.get(row.ownerId) ?? '' },
    own: row.ownerId === auth.user.id,
    updatedAt: row.updatedAt.toISOString(),
    content: presetContentSchema.parse(JSON.parse(row.content)),
  }))
}
