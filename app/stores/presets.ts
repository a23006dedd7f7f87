import { presetListSchema, presetSchema, type Preset, type PresetCreate } from '#shared/schemas/presets'

/** Devices the team has saved. */
export const usePresetsStore = defineStore('presets', () => {
  const api = useApi()
  const presets = ref<Preset[]>([])
  const loaded = ref(false)

  async function load() {
    const reply = await api.json('/api/presets', presetListSchema)
    presets.value = reply.presets
    loaded.value = true
  }

  /** Throws a ProblemError whose pointers lead into the preset (/name, /content/device/…). */
  async function save(preset: PresetCreate) {
    const saved = await api.json('/api/presets', presetSchema, { method: 'POST', body: preset })
    presets.value = [saved, ...presets.value]
    return saved
  }

  /** Takes it off everybody's list; jobs made from it keep their own copy of the numbers. */
  async function archive(id: string) {
    await api.json(`/api/presets/${id}/archive`, presetSchema, { method: 'POST' })
    presets.value = presets.value.filter(preset => preset.id !== id)
  }

  return { presets, loaded, load, save, archive }
})
