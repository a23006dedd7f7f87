import { Op } from 'sequelize'
import type { InferAttributes, Transaction, WhereOptions } from 'sequelize'
import type { JobSpec } from '#shared/schemas/job'
import { presetContentSchema } from '#shared/schemas/presets'
import type { PresetContent, PresetEdit } from '#shared/schemas/presets'
import { sameDevice } from '#shared/utils/device'
import type { Database } from './database'
import type { Job } from './jobs'
import type { Preset } from './records'
import { NoSuchPreset, StaleVersion } from './refusals'
import { inTransaction } from './transaction'

/** Who asks. */
export interface Reader { userId: string, teamId: string }

/** The version of a preset that a job is made from. */
export interface PresetPin { id: string, version: number }
/** How a job's row says so. */
export type PinnedColumns = Pick<InferAttributes<Job>, 'presetId' | 'presetVersion' | 'presetName' | 'presetChanged'>

/** Presets that a reader may see: those that the team shares, and the reader's own. */
export const visibleTo = ({ userId, teamId }: Reader): WhereOptions<InferAttributes<Preset>> =>
  ({ teamId, [Op.or]: [{ shared: true }, { ownerId: userId }] })

/** Content of a row of either table. */
export const contentOf = (row: { content: string }): PresetContent => presetContentSchema.parse(JSON.parse(row.content))

/** Adds a preset with its first version. */
export async function createPreset(db: Database, tx: Transaction, owner: Reader, made: { name: string, note: string, shared: boolean, content: PresetContent }): Promise<Preset> {
  const { name, note, shared } = made
  const content = JSON.stringify(made.content)
  const preset = await db.models.Preset.create({ teamId: owner.teamId, ownerId: owner.userId, name, note, shared, content }, { transaction: tx })
  await db.models.PresetVersion.create({ presetId: preset.id, version: 1, name, note, content, authorId: owner.userId }, { transaction: tx })
  return preset
}

/**
 * Changes a preset if `from` is still its newest version. Name, note and content make a new version; sharing makes none,
 * since a version is what jobs are made from; a change to nothing changes nothing.
 * @throws StaleVersion when somebody was quicker
 */
export async function editPreset(db: Database, id: string, edit: PresetEdit, { from, by }: { from: number, by: string }): Promise<void> {
  await inTransaction(db, async (tx) => {
    const { Preset, PresetVersion } = db.models
    const preset = await Preset.findByPk(id, { lock: tx.LOCK.UPDATE, transaction: tx, rejectOnEmpty: true })
    if (preset.version !== from) throw new StaleVersion()
    const name = edit.name ?? preset.name
    const note = edit.note ?? preset.note
    const content = edit.content ? JSON.stringify(edit.content) : preset.content
    const said = name !== preset.name || note !== preset.note || content !== JSON.stringify(contentOf(preset))
    const shared = edit.shared ?? preset.shared
    if (!said && shared === preset.shared) return
    const version = said ? from + 1 : from
    if (said) await PresetVersion.create({ presetId: id, version, name, note, content, authorId: by }, { transaction: tx })
    await Preset.update({ name, note, content, version, shared }, { where: { id }, transaction: tx })
  })
}

/**
 * What a job's row keeps of the preset it is made from, after looking whether the user has that preset and version, and
 * whether the job's device is still the one that it says.
 * @throws NoSuchPreset
 */
export async function readPin(db: Database, job: Reader & { spec: JobSpec }, pin: PresetPin): Promise<PinnedColumns> {
  const preset = await db.models.Preset.findOne({ where: { [Op.and]: [{ id: pin.id }, visibleTo(job)] }, attributes: ['id'] })
  if (!preset) throw new NoSuchPreset('preset')
  const version = await db.models.PresetVersion.findOne({ where: { presetId: pin.id, version: pin.version } })
  if (!version) throw new NoSuchPreset('version')
  return {
    presetId: pin.id, presetVersion: pin.version, presetName: version.name, presetChanged: !sameDevice(contentOf(version).device, job.spec.device),
  }
}
