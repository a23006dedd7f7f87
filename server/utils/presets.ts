import { setResponseHeader } from 'h3'
import type { H3Event } from 'h3'
import { Op } from 'sequelize'
import type { Preset, PresetVersion } from '#shared/schemas/presets'
import type { Database } from '../models/database'
import { contentOf, visibleTo } from '../models/presets'
import type { Preset as PresetRow, PresetVersion as VersionRow } from '../models/records'
import type { Auth } from './auth'
import { requireOwner } from './jobs'
import { HttpProblem } from './problems'

/** A preset that the reader may see, archived or not. @throws HttpProblem not-found */
export async function findPreset(db: Database, auth: Auth, id: string): Promise<PresetRow> {
  const preset = await db.models.Preset.findOne({ where: { [Op.and]: [{ id }, visibleTo({ userId: auth.user.id, teamId: auth.team.id })] } })
  if (!preset) throw new HttpProblem('not-found')
  return preset
}

/** A preset that the reader may change. @throws HttpProblem not-found, forbidden */
export async function findOwnPreset(db: Database, auth: Auth, id: string): Promise<PresetRow> {
  const preset = await findPreset(db, auth, id)
  requireOwner(auth, preset)
  return preset
}

/** Answers with one preset, tagged with its version. */
export async function replyPreset(db: Database, auth: Auth, event: H3Event, id: string): Promise<Preset> {
  const [preset] = await presentPresets(db, auth, [await findPreset(db, auth, id)])
  setResponseHeader(event, 'ETag', `"${preset!.version}"`)
  return preset!
}

/** Presets for one reader, in the order given. */
export async function presentPresets(db: Database, auth: Auth, rows: readonly PresetRow[]): Promise<Preset[]> {
  const people = await namesOf(db, rows.map(row => row.ownerId))
  return rows.map(row => ({
    id: row.id,
    name: row.name,
    note: row.note,
    owner: people(row.ownerId),
    own: row.ownerId === auth.user.id,
    shared: row.shared,
    archived: row.archivedAt !== null && row.archivedAt !== undefined,
    version: row.version,
    updatedAt: row.updatedAt.toISOString(),
    content: contentOf(row),
  }))
}

/** Versions of a preset, in the order given. */
export async function presentVersions(db: Database, rows: readonly VersionRow[]): Promise<PresetVersion[]> {
  const people = await namesOf(db, rows.map(row => row.authorId))
  return rows.map(row => ({
    version: row.version, name: row.name, note: row.note, content: contentOf(row), by: people(row.authorId), at: row.createdAt.toISOString(),
  }))
}

async function namesOf(db: Database, ids: readonly string[]): Promise<(id: string) => { id: string, name: string }> {
  const users = await db.models.User.findAll({ where: { id: [...new Set(ids)] }, attributes: ['id', 'name'] })
  const names = new Map(users.map(user => [user.id, user.name]))
  return id => ({ id, name: names.get(id) ?? '' })
}
