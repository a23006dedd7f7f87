import { z } from 'zod'
import { idSchema, instantSchema } from './ids'
import { deviceSchema } from './job'

export const presetContentSchema = z.strictObject({ device: deviceSchema })
export type PresetContent = z.infer<typeof presetContentSchema>

const person = z.strictObject({ id: idSchema, name: z.string() })

export const presetSchema = z.strictObject({
  id: idSchema,
  name: z.string(),
  note: z.string(),
  owner: person,
  own: z.boolean(),
  shared: z.boolean().meta({ description: 'Whether the team sees it; otherwise its owner alone does.' }),
  archived: z.boolean(),
  version: z.int().min(1).meta({ description: 'The newest version. Name, note and content belong to a version; sharing and archiving do not.' }),
  updatedAt: instantSchema,
  content: presetContentSchema,
})
export type Preset = z.infer<typeof presetSchema>
export const presetListSchema = z.strictObject({ presets: z.array(presetSchema) })
export const presetListQuerySchema = z.strictObject({ archived: z.literal('1').optional().meta({ description: 'Archived ones too.' }) })

const name = z.string().trim().min(1, { error: 'Give the preset a name.' }).max(60)
const note = z.string().trim().max(500)

export const presetCreateSchema = z.strictObject({ name, note: note.default(''), shared: z.boolean().default(true), content: presetContentSchema })
export type PresetCreate = z.input<typeof presetCreateSchema>

/** Only what is given changes. */
export const presetEditSchema = z.strictObject({
  name: name.optional(), note: note.optional(), shared: z.boolean().optional(), content: presetContentSchema.optional(),
})
export type PresetEdit = z.infer<typeof presetEditSchema>

export const presetVersionSchema = z.strictObject({
  version: z.int().min(1), name: z.string(), note: z.string(), content: presetContentSchema, by: person, at: instantSchema,
})
export type PresetVersion = z.infer<typeof presetVersionSchema>
export const presetVersionListSchema = z.strictObject({ versions: z.array(presetVersionSchema) })

/** Which version of a preset a job was made from. */
export const jobPresetSchema = z.strictObject({
  id: idSchema,
  name: z.string(),
  version: z.int().min(1),
  changed: z.boolean().meta({ description: 'Whether the device of the job differs from that version.' }),
})
export type JobPreset = z.infer<typeof jobPresetSchema>

/** The preset that a new job is made from: both or neither. */
export const jobPinQuerySchema = z.strictObject({
  preset: idSchema.optional(),
  version: z.string().regex(/^[1-9]\d{0,8}$/).transform(Number).optional(),
}).refine(pin => (pin.preset === undefined) === (pin.version === undefined), { path: ['version'], error: 'Give preset and version together.' })
