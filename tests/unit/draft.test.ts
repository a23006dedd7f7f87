import { describe, expect, it } from 'vitest'
import { jobSpecSchema, type JobSpec } from '#shared/schemas/job'
import { sameDevice } from '#shared/utils/device'
import { sentence } from '#shared/utils/sentence'
import { DEFAULT_SPEC, defaultDraft, deviceOf, draftFromSpec, draftSchema, drawSeed, readDraft, withDevice, type Draft } from '~/utils/bench/draft'
import { fieldAt, FIELDS, isAsked, locate } from '~/utils/bench/fields'
import { choiceForm, FORMS, isChoice } from '~/utils/bench/forms'
import { WORKED_SET } from '../support/specs'

const plain = (text: string) => text.replaceAll('\u202F', ' ')
const typed = (changes: Record<string, string>, units: Record<string, string> = {}): Draft => {
  const draft = defaultDraft(7)
  return { choices: draft.choices, texts: { ...draft.texts, ...changes }, units: { ...draft.units, ...units } }
}
const read = (draft: Draft) => readDraft(draft, DEFAULT_SPEC)

describe('a draft', () => {
  it('starts as the example cell, asked in whole', () => {
    const { spec, issues } = read(defaultDraft(7))
    expect(issues).toEqual([])
    expect(plain(sentence(spec!))).toBe('How fast does cell Q-28, 28 nm switch from parallel to antiparallel under 62 µA, 10 ns, 0.3 ns edges at 85 °C, over 10 000 trials?')
    expect(spec!.numerics.seed).toBe(7)
    expect(sameDevice(spec!.device, DEFAULT_SPEC.device)).toBe(true)
  })

  it.each<[string, JobSpec]>([
    ['a switching job', jobSpecSchema.parse(WORKED_SET)],
    ['motion under a voltage in a field', jobSpecSchema.parse({
      ...WORKED_SET, question: { kind: 'motion', paths: 12, after: 2e-9 },
      device: { ...WORKED_SET.device, anisotropy: { kind: 'interface', interfaceAnisotropy: 1.22e-3 }, torque: { kind: 'asymmetric', polarization: 0.6, asymmetry: 1.5 }, fieldLikeRatio: -0.2, referenceTilt: 0.1 },
      environment: { temperature: 250, appliedField: { x: -1234.5, y: 0, z: 3978.873577 } },
      write: { direction: 'antiparallelToParallel', drive: { kind: 'voltage', voltage: 0.6125 }, width: 3.25e-9, edge: 0.1e-9 },
      numerics: { seed: 4_294_967_295, step: { kind: 'fixed', step: 2e-12 } },
    })],
  ])('says what %s says, and gives the same numbers back', (_name, spec) => {
    const back = read(draftFromSpec(spec)).spec!
    const numbers = (value: unknown): number[] => typeof value === 'number' ? [value] : value && typeof value === 'object' ? Object.keys(value).sort().flatMap(key => numbers((value as Record<string, unknown>)[key])) : []
    const [a, b] = [numbers(spec), numbers(back)]
    expect(b).toHaveLength(a.length)
    a.forEach((value, k) => expect(Math.abs(b[k]! - value)).toBeLessThanOrEqual(1e-8 * Math.abs(value)))
    expect(sentence(back)).toBe(sentence(spec))
  })

  it('names the entry at fault, keeps the text and still reads as a sentence', () => {
    const draft = typed({ 'device.damping': 'a lot', 'write.width': '' })
    const { spec, issues, shown } = read(draft)
    expect(spec).toBeNull()
    expect(issues.map(issue => [issue.path, issue.part])).toEqual([['device.damping', 'device'], ['write.width', 'drive']])
    expect(issues[0]!.message).toContain('a lot')
    expect(sentence(shown)).toBe(sentence(DEFAULT_SPEC))
    expect(draft.texts['device.damping']).toBe('a lot')
  })

  it.each([
    ['write.edge', '11', 'full amplitude'],
    ['device.damping', '3', 'At most 2'],
    ['device.thickness', '0', 'At least 0.1 nm'],
    ['question.trials', '10.5', 'whole'],
    ['question.trials', '9', 'At least 10'],
    ['numerics.seed', '4294967296', 'At most'],
    ['device.label', '   ', 'name'],
    ['environment.temperature', '−300', 'At least −272'],
  ])('refuses %s = %j in words', (path, text, words) => {
    const { spec, issues } = read(typed({ [path]: text }))
    expect(spec).toBeNull()
    expect(plain(issues.map(issue => issue.message).join())).toContain(words)
    expect(issues[0]!.path).toBe(path)
  })

  it('states limits in the unit typed', () => {
    const { issues } = read(typed({ 'device.thickness': '0.5 Å' }))
    expect(plain(issues[0]!.message)).toBe('At least 1 Å.')
  })

  it('ignores faults in what is not asked', () => {
    expect(read(typed({ 'write.drive.voltage': 'later', 'question.paths': '' })).spec).not.toBeNull()
  })

  it('survives being kept, faults included, and nothing else does', () => {
    const draft = typed({ 'device.damping': '' })
    expect(draftSchema.safeParse(JSON.parse(JSON.stringify(draft))).data).toEqual(draft)
    expect(draftSchema.safeParse({ ...draft, choices: { ...draft.choices, 'write.drive.kind': 'heat' } }).success).toBe(false)
  })

  it('takes a device and leaves the rest as typed', () => {
    const draft = typed({ 'write.width': 'soon' })
    const device = { ...DEFAULT_SPEC.device, label: 'K-32', anisotropy: { kind: 'interface' as const, interfaceAnisotropy: 1.22e-3 } }
    const next = withDevice(draft, device)
    expect(next.texts['write.width']).toBe('soon')
    expect(next.choices['device.anisotropy.kind']).toBe('interface')
    expect(sameDevice(deviceOf(next)!, device)).toBe(true)
    expect(deviceOf({ ...next, texts: { ...next.texts, 'device.diameter': '' } })).toBeNull()
    expect(draft.choices['device.anisotropy.kind']).toBe('effectiveField')
  })

  it('draws seeds that differ and fit', () => {
    const seeds = Array.from({ length: 20 }, drawSeed)
    expect(new Set(seeds).size).toBeGreaterThan(15)
    expect(seeds.every(seed => Number.isInteger(seed) && seed >= 0 && seed < 2 ** 32)).toBe(true)
  })
})

describe('entries and forms', () => {
  it('cover every number of every specification', () => {
    const leaves = (value: object, prefix = ''): string[] => Object.entries(value).flatMap(([key, inner]) => typeof inner === 'object' && inner !== null ? leaves(inner, `${prefix}${key}.`) : [`${prefix}${key}`])
    const known = new Set([...FIELDS.map(field => field.path), 'schemaVersion'])
    for (const path of leaves(DEFAULT_SPEC)) expect(known.has(path) || isChoice(path), path).toBe(true)
  })

  it('stand in exactly one form each', () => {
    const rows = Object.values(FORMS).flatMap(form => [...form.rows, ...(form.more ?? []).flatMap(group => group.rows)])
    expect(new Set(rows).size).toBe(rows.length)
    expect(rows.filter(path => !isChoice(path)).sort()).toEqual(FIELDS.map(field => field.path).sort())
    for (const path of rows) if (isChoice(path)) expect(choiceForm(path).options.every(option => option.text.length > 3)).toBe(true)
  })

  it('are found from any path into the specification', () => {
    const { choices } = defaultDraft(1)
    expect(locate(['device', 'damping'], choices)).toEqual({ path: 'device.damping', part: 'device' })
    expect(locate(['environment', 'appliedField'], choices)).toEqual({ path: null, part: 'environment' })
    expect(locate(['numerics', 'step', 'step'], choices)).toEqual({ path: null, part: 'counting' })
    expect(locate(['question'], choices)).toEqual({ path: 'question.trials', part: 'counting' })
    expect(locate(['device', 'anisotropy'], choices).path).toBe('device.anisotropy.anisotropyField')
    expect(locate([], choices).path).toBeNull()
    expect(() => fieldAt('device.colour')).toThrow()
    expect(isAsked(fieldAt('write.drive.voltage'), choices)).toBe(false)
  })
})
