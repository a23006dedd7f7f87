import { z } from 'zod'
import type { Preset } from '#shared/schemas/presets'
import { openDesk } from '~/utils/bench/desk'
import type { PresetText } from '~/utils/presetChanges'

const typedSchema = z.strictObject({ name: z.string(), note: z.string() })

/**
 * A preset being edited: its cell on a desk of its own, its name and note. What was typed survives reloads and refusals
 * until it is saved or put away.
 */
export function usePresetEditor(id: string) {
  const session = useSessionStore()
  const presets = usePresetsStore()
  const bench = useDraftStore()

  const name = ref('')
  const note = ref('')
  /** name and note that were typed before something else was taken */
  const before = ref<{ name: string, note: string } | null>(null)
  const errors = ref<{ name?: string, note?: string }>({})
  /** whether something that was typed has just been put away */
  const putBy = ref(false)
  /** what somebody else saved meanwhile */
  const conflict = ref<Preset | null>(null)
  /** the text that the edit started from */
  const base = ref<Preset | null>(null)

  const desk = reactive(openDesk({
    userId: () => session.me?.user.id ?? null,
    place: `preset-${id}-`,
    submit: async (spec) => {
      try {
        return await presets.edit(id, { name: name.value.trim(), note: note.value.trim(), content: { device: spec.device } }, base.value?.version ?? 0)
      }
      catch (error) {
        throw error instanceof ProblemError ? learn(error) : error
      }
    },
  }))
  provideDesk(desk)
  const key = () => `farpole-preset-${session.me?.user.id ?? 'nobody'}-${id}`

  const text = computed<PresetText | null>(() => desk.device && { name: name.value.trim(), note: note.value.trim(), content: { device: desk.device } })
  const dirty = computed(() => base.value !== null && (text.value === null || presetChanges(base.value, text.value).length > 0))

  /** Starts from what the preset says; what was typed before stays to be brought back. */
  function start(preset: Preset) {
    before.value = { name: name.value, note: note.value }
    desk.loadPreset(preset)
    name.value = preset.name
    note.value = preset.note
    base.value = preset
    errors.value = {}
    conflict.value = null
  }

  function forget() {
    desk.forget()
    localStorage.removeItem(key())
  }

  /** Back to what the preset says; what was typed can be brought back. */
  function putAway() {
    const had = dirty.value
    forget()
    const preset = presets.find(id)
    if (preset) start(preset)
    putBy.value = had
  }

  /** Shows a preset, or what was typed on it before the page was left. In the browser alone. */
  function begin(preset: Preset) {
    if (bench.restore()) desk.draft.units = { ...desk.draft.units, ...bench.draft.units }
    start(preset)
    const typed = parseTyped(localStorage.getItem(key()))
    if (!typed || !desk.restore() || desk.pin === null) return
    name.value = typed.name
    note.value = typed.note
    const from = presets.versions[id]?.find(version => version.version === desk.pin?.version)
    if (!from || from.version === preset.version) return
    base.value = { ...preset, ...from }
    conflict.value = preset
  }

  function keep() {
    if (!dirty.value) return
    desk.keep()
    localStorage.setItem(key(), JSON.stringify({ name: name.value, note: note.value }))
  }

  /** Saves what is shown as the next version. False where it was refused and the reason is on the page. */
  async function save(): Promise<boolean> {
    errors.value = name.value.trim() === '' ? { name: 'Give the preset a name.' } : {}
    if (errors.value.name || await desk.queue() === null) return false
    putAway()
    putBy.value = false
    await presets.open(id)
    return true
  }

  /** Takes from a refusal what is shown here; what is left of it is shown at the entries of the cell. */
  function learn(error: ProblemError): ProblemError {
    if (error.problem.current) conflict.value = presets.keep(error.problem.current)
    errors.value = { name: error.at('/name'), note: error.at('/note') }
    const ofTheCell = error.problem.errors?.filter(({ pointer }) => pointer.startsWith('/content')).map(({ pointer, detail }) => ({ pointer: pointer.replace('/content', ''), detail }))
    return new ProblemError({ ...error.problem, errors: ofTheCell })
  }

  /** Goes on with what was typed, from the version that somebody else saved: the next save replaces that one. */
  function keepMine() {
    if (conflict.value) {
      base.value = conflict.value
      desk.recognise(conflict.value)
    }
    conflict.value = null
  }
  /** Goes on with what somebody else saved; what was typed can be brought back. */
  function takeTheirs() {
    if (conflict.value) start(conflict.value)
    forget()
    putBy.value = true
  }

  /** Puts back what was typed before something else was taken. */
  function bringBack() {
    desk.bringBack()
    putBy.value = false
    name.value = before.value?.name ?? name.value
    note.value = before.value?.note ?? note.value
  }

  return { desk, name, note, errors, conflict, base, text, dirty, putBy, begin, start, putAway, keep, save, keepMine, takeTheirs, bringBack }
}

function parseTyped(text: string | null) {
  if (text === null) return null
  try {
    return typedSchema.safeParse(JSON.parse(text)).data ?? null
  }
  catch {
    return null
  }
}
