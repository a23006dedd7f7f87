import type { Preset, PresetVersion } from '#shared/schemas/presets'
import { deviceChanges } from '#shared/utils/device'
import { formatPlain } from '#shared/utils/quantity'
import { FIELDS } from './bench/fields'
import { choiceForm, isChoice } from './bench/forms'

/** What a preset says: at a version, as it stands, or as somebody has typed it. */
export type PresetText = Pick<PresetVersion, 'name' | 'note' | 'content'>

/** One field that differs between two versions, in the reader's units; null where a version does not have it. */
export interface PresetChange { key: string, label: string, before: string | null, after: string | null }

type Leaf = string | number | boolean | null | undefined

/** A value of the device in words, in the unit that the reader chose for it on the bench. */
function words(path: string, value: Leaf, units: Record<string, string>): string | null {
  if (value === undefined || value === null) return null
  if (isChoice(path)) return choiceForm(path).options.find(option => option.value === value)?.text ?? String(value)
  const field = FIELDS.find(one => one.path === path)
  return field?.kind === 'quantity' && typeof value === 'number' ? formatPlain(value, field.dimension, units[path] ?? field.unit) : String(value)
}

function labelOf(path: string): string {
  if (isChoice(path)) return choiceForm(path).label
  return FIELDS.find(one => one.path === path)?.label ?? path.replace(/^device\./, '')
}

/** Field by field what changed from one text of a preset to another. `units`: unit by path, as on the bench. */
export function presetChanges(before: PresetText, after: PresetText, units: Record<string, string> = {}): PresetChange[] {
  const changes: PresetChange[] = []
  if (before.name !== after.name) changes.push({ key: 'name', label: 'Name of the preset', before: before.name, after: after.name })
  if (before.note !== after.note) changes.push({ key: 'note', label: 'Note', before: before.note || null, after: after.note || null })
  for (const change of deviceChanges(before.content.device, after.content.device)) {
    const path = `device.${change.path}`
    changes.push({ key: path, label: labelOf(path), before: words(path, change.before, units), after: words(path, change.after, units) })
  }
  return changes
}

/** Whether a preset is what somebody looks for: every word in its name, note, owner or cell. */
export function matchesPreset(preset: Preset, search: string): boolean {
  const text = [preset.name, preset.note, preset.owner.name, preset.own ? 'you' : '', preset.content.device.label].join(' ').toLowerCase()
  return search.toLowerCase().split(/\s+/).every(word => text.includes(word))
}
