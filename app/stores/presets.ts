import { presetListSchema, presetSchema, presetVersionListSchema, type Preset, type PresetCreate, type PresetEdit, type PresetVersion } from '#shared/schemas/presets'

/** Devices the team has saved, and the reader's private ones. */
export const usePresetsStore = defineStore('presets', () => {
  const api = useApi()
  /** archived ones among them where they were asked for */
  const known = ref<Preset[]>([])
  const presets = computed(() => known.value.filter(preset => !preset.archived))
  const versions = ref<Record<string, PresetVersion[]>>({})
  const loaded = ref(false)

  async function load({ archived = false } = {}) {
    const reply = await api.json('/api/presets', presetListSchema, { query: archived ? { archived: '1' } : {} })
    known.value = reply.presets
    loaded.value = true
  }

  const find = (id: string) => known.value.find(preset => preset.id === id) ?? null

  function keep(preset: Preset) {
    known.value = find(preset.id) ? known.value.map(one => one.id === preset.id ? preset : one) : [...known.value, preset]
    return preset
  }

  /** Reads one preset with its versions. Throws a ProblemError (404: not there or not yours to see). */
  async function open(id: string) {
    const [preset, history] = await Promise.all([api.json(`/api/presets/${id}`, presetSchema), api.json(`/api/presets/${id}/versions`, presetVersionListSchema)])
    keep(preset)
    versions.value = { ...versions.value, [id]: history.versions }
    return preset
  }

  /** One version of a preset as the bench takes it. Throws a ProblemError; null where there is no such version. */
  async function version(id: string, number: number) {
    const { versions: all } = await api.json(`/api/presets/${id}/versions`, presetVersionListSchema)
    const found = all.find(one => one.version === number)
    return found ? { id, name: found.name, version: found.version, content: found.content } : null
  }

  /** Throws a ProblemError whose pointers lead into the preset (/name, /content/device/…). */
  const save = async (preset: PresetCreate) => keep(await api.json('/api/presets', presetSchema, { method: 'POST', body: preset }))

  /** Changes a preset that stands at version `from`. Throws a ProblemError: 412 with what stands there now in `problem.current`. */
  async function edit(id: string, change: PresetEdit, from: number) {
    const preset = keep(await api.json(`/api/presets/${id}`, presetSchema, { method: 'PATCH', body: change, headers: { 'If-Match': `"${from}"` } }))
    return preset
  }

  /** Takes it off the lists, or puts it back; jobs made from it keep their own copy of the numbers. */
  const archive = async (id: string) => keep(await api.json(`/api/presets/${id}/archive`, presetSchema, { method: 'POST' }))
  const restore = async (id: string) => keep(await api.json(`/api/presets/${id}/restore`, presetSchema, { method: 'POST' }))

  return { known, presets, versions, loaded, load, find, keep, open, version, save, edit, archive, restore }
})
