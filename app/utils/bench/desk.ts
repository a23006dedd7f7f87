import { computed, ref, watch } from 'vue'
import { z } from 'zod'
import { deviceSchema, type Device, type JobSpec } from '#shared/schemas/job'
import type { Preset } from '#shared/schemas/presets'
import { sameDevice } from '#shared/utils/device'
import { parseQuantity } from '#shared/utils/quantity'
import type { SentencePart } from '#shared/utils/sentence'
import { ProblemError } from '../problem'
import { defaultDraft, DEFAULT_SPEC, deviceOf, draftFromSpec, draftSchema, drawSeed, readDraft, withDevice, type Draft, type Issue } from './draft'
import { nudged, withoutUnit } from './entry'
import { fieldAt, locate, type ChoicePath, type Choices } from './fields'

/** Where the numbers on the bench came from. */
const originSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('example') }),
  z.strictObject({ kind: z.literal('typed') }),
  z.strictObject({ kind: z.literal('preset'), id: z.string(), name: z.string(), version: z.number(), device: deviceSchema }),
  z.strictObject({ kind: z.literal('job'), id: z.string(), device: deviceSchema }),
])
type Origin = z.infer<typeof originSchema>

/** One press of Queue: a retry of the same body carries the same key. */
const attemptSchema = z.strictObject({ body: z.string(), key: z.string() })

const keptSchema = z.strictObject({
  version: z.literal(1), draft: draftSchema, origin: originSchema.catch({ kind: 'typed' }), attempt: attemptSchema.nullable(), shelved: draftSchema.nullable(),
})
type Kept = z.infer<typeof keptSchema>

export type Refusal = { title: string, priceCpuSeconds: number | null, leftCpuSeconds: number | null, capCpuSeconds: number | null }

/** A version of a preset, as far as the bench keeps it. */
export type PresetOnBench = Pick<Preset, 'id' | 'name' | 'version' | 'content'>
export type Pin = Pick<Preset, 'id' | 'version'>

/** What a desk needs from outside. */
export interface DeskNeeds {
  /** whose drafts are kept apart in a browser that several use */
  userId: () => string | null
  /** tells the drafts of other desks from those of the bench */
  place?: string
  /** sends what is shown, with the preset that it started from; throws a ProblemError where the server refuses */
  submit: (spec: JobSpec, key: string, pin: Pin | null) => Promise<{ id: string }>
}

/** Everything typed on the bench, what it says, and what keeps it from being asked. Survives reloads, faults included. */
export function openDesk({ userId, place = '', submit }: DeskNeeds) {
  const draft = ref<Draft>(defaultDraft(drawSeed()))
  const origin = ref<Origin>({ kind: 'example' })
  /** what was on the bench before something else was loaded over it */
  const shelved = ref<Draft | null>(null)
  const open = ref<SentencePart | null>('device')
  /** faults that only physics or the server could find, until their entry changes */
  const found = ref<{ physics: Issue | null, server: Issue[] }>({ physics: null, server: [] })
  const attempt = ref<Kept['attempt']>(null)
  const sending = ref(false)
  const refusal = ref<Refusal | null>(null)

  // No ref: a reading may not depend on what the last one was.
  let lastGood: JobSpec = DEFAULT_SPEC
  const reading = computed(() => readDraft(draft.value, lastGood))
  const spec = computed(() => reading.value.spec)
  const issues = computed<Issue[]>(() => [...reading.value.issues, ...(reading.value.spec && found.value.physics ? [found.value.physics] : []), ...found.value.server])
  const issueOf = (path: string) => issues.value.find(issue => issue.path === path)
  const device = computed<Device | null>(() => deviceOf(draft.value))

  watch(spec, (now) => {
    if (now) lastGood = now
  }, { immediate: true, flush: 'sync' })

  /** The preset that the cell on the bench started from. */
  const pin = computed<Pin | null>(() => origin.value.kind === 'preset' ? { id: origin.value.id, version: origin.value.version } : null)
  const changed = computed(() => 'device' in origin.value && (device.value === null || !sameDevice(device.value, origin.value.device)))
  const originWords = computed(() => {
    const from = origin.value
    if (from.kind === 'example') return 'an example to start from'
    if (from.kind === 'typed') return 'typed on the bench'
    return `${from.kind === 'preset' ? `preset ${from.name} v${from.version}` : 'from an earlier job'}${changed.value ? ' · changed' : ''}`
  })

  function touched(path: string) {
    refusal.value = null
    found.value = { physics: found.value.physics, server: found.value.server.filter(issue => issue.path !== path && issue.path !== null) }
  }

  /** Takes a text as typed. A unit typed after the number becomes the entry's unit. */
  function type(path: string, text: string) {
    draft.value.texts[path] = text
    const field = fieldAt(path)
    if (field.kind === 'quantity') {
      const parsed = parseQuantity(text, field.dimension, draft.value.units[path])
      if (parsed.ok) draft.value.units[path] = parsed.unit
    }
    touched(path)
  }

  /** Reads the same number in another unit; a unit typed after the number gives way. */
  function chooseUnit(path: string, unit: string) {
    draft.value.units[path] = unit
    draft.value.texts[path] = withoutUnit(draft.value.texts[path] ?? '')
    touched(path)
  }

  function nudge(path: string, direction: 1 | -1, coarse: boolean) {
    const next = nudged(fieldAt(path), draft.value.texts[path] ?? '', draft.value.units[path], direction, coarse)
    if (next !== null) type(path, next)
  }

  function choose<P extends ChoicePath>(path: P, value: Choices[P]) {
    draft.value.choices[path] = value
    touched(path)
  }

  const newSeed = () => type('numerics.seed', String(drawSeed()))

  function replace(next: Draft, from: Origin) {
    shelved.value = draft.value
    draft.value = next
    origin.value = from
    found.value = { physics: null, server: [] }
    refusal.value = null
  }

  const originOf = ({ id, name, version, content }: PresetOnBench): Origin => ({ kind: 'preset', id, name, version, device: content.device })
  const loadPreset = (preset: PresetOnBench) => replace(withDevice(draft.value, preset.content.device), originOf(preset))

  /** Run again with changes: everything as it was asked, but with a seed of its own. */
  function loadSpec(from: { id: string, spec: JobSpec }) {
    const asked = { ...from.spec, numerics: { ...from.spec.numerics, seed: drawSeed() } }
    replace(draftFromSpec(asked, draft.value), { kind: 'job', id: from.id, device: from.spec.device })
  }

  function bringBack() {
    if (shelved.value) replace(shelved.value, { kind: 'typed' })
    shelved.value = null
  }

  /** The cell on the bench counts as started from that version of a preset; what is typed stays. */
  function recognise(preset: PresetOnBench) {
    origin.value = originOf(preset)
  }

  function setPhysicsIssue(refused: { path: readonly (string | number)[], message: string } | null) {
    const issue = refused && { ...locate(refused.path, draft.value.choices), message: refused.message }
    found.value = { ...found.value, physics: issue }
  }

  function take(error: ProblemError) {
    const at = error.problem.errors ?? []
    if (error.at('/preset') ?? error.at('/version')) {
      origin.value = { kind: 'typed' }
      refusal.value = { title: 'The preset is not there for you any more. Queue again to ask without it: the numbers are all here.', priceCpuSeconds: null, leftCpuSeconds: null, capCpuSeconds: null }
      return
    }
    found.value = { ...found.value, server: at.map(({ pointer, detail }) => ({ ...locate(pointer.split('/').slice(1), draft.value.choices), message: detail })) }
    const first = found.value.server[0]
    if (first) open.value = first.part
    else refusal.value = { title: error.message, priceCpuSeconds: error.problem.predictedCpuSeconds ?? null, leftCpuSeconds: error.problem.leftCpuSeconds ?? null, capCpuSeconds: error.problem.capCpuSeconds ?? null }
  }

  /** Queues exactly what is shown. The id of the job, or null where it was refused and the reason is now on the page. */
  async function queue(): Promise<string | null> {
    if (!spec.value || issues.value.length > 0 || sending.value) return null
    const body = JSON.stringify([spec.value, pin.value])
    if (attempt.value?.body !== body) attempt.value = { body, key: crypto.randomUUID() }
    keep()
    sending.value = true
    refusal.value = null
    try {
      const job = await submit(spec.value, attempt.value.key, pin.value)
      attempt.value = null
      shelved.value = null
      keep()
      return job.id
    }
    catch (error) {
      if (!(error instanceof ProblemError) || error.status === 401) throw error
      take(error)
      return null
    }
    finally {
      sending.value = false
    }
  }

  const storageKey = () => `farpole-draft-${place}${userId() ?? 'nobody'}`

  function keep() {
    const kept: Kept = { version: 1, draft: draft.value, origin: origin.value, attempt: attempt.value, shelved: shelved.value }
    localStorage.setItem(storageKey(), JSON.stringify(kept))
  }

  /** Nothing of this desk is kept any more. */
  const forget = () => localStorage.removeItem(storageKey())

  /** Puts the kept draft back on the bench. False where there is none of this version. */
  function restore(): boolean {
    const kept = parseKept(localStorage.getItem(storageKey()))
    if (!kept) return false
    // A draft may have been kept before there were some of the entries.
    const fresh = defaultDraft(drawSeed())
    draft.value = { ...kept.draft, texts: { ...fresh.texts, ...kept.draft.texts }, units: { ...fresh.units, ...kept.draft.units } }
    origin.value = kept.origin
    attempt.value = kept.attempt
    shelved.value = kept.shelved
    return true
  }

  return {
    draft, origin, shelved, open, sending, refusal, attempt, found, spec, reading, issues, device, originWords, pin, changed,
    issueOf, type, chooseUnit, nudge, choose, newSeed, loadPreset, loadSpec, bringBack, recognise, setPhysicsIssue, queue, keep, forget, restore,
  }
}

function parseKept(text: string | null): Kept | null {
  if (text === null) return null
  try {
    return keptSchema.safeParse(JSON.parse(text)).data ?? null
  }
  catch {
    return null
  }
}
