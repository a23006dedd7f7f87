import { describe, expect, it } from 'vitest'
import type { Preset } from '#shared/schemas/presets'
import { deviceChanges, sameDevice } from '#shared/utils/device'
import { cellWords } from '#shared/utils/sentence'
import { DEFAULT_SPEC } from '~/utils/bench/draft'
import { matchesPreset, presetChanges } from '~/utils/presetChanges'

const { device } = DEFAULT_SPEC
const text = { name: 'Q-28', note: '', content: { device } }
const plain = (value: string | null) => value?.replaceAll('\u202F', ' ') ?? null

describe('two devices', () => {
  it('are the same to eight figures, and differ where anybody could have typed it', () => {
    expect(sameDevice(device, { ...device, damping: device.damping * (1 + 1e-12) })).toBe(true)
    expect(sameDevice(device, { ...device, damping: device.damping * (1 + 1e-7) })).toBe(false)
    expect(sameDevice(device, { ...device, label: 'other' })).toBe(false)
    expect(sameDevice(device, { ...device, torque: { kind: 'symmetric', polarization: 0.55 } })).toBe(false)
  })

  it('are compared leaf by leaf, also where only one of them has a value', () => {
    expect(deviceChanges(device, device)).toEqual([])
    const other = { ...device, damping: 0.01, torque: { kind: 'symmetric' as const, polarization: 0.6 } }
    expect(deviceChanges(device, other)).toEqual([
      { path: 'damping', before: 0.008, after: 0.01 },
      { path: 'torque.kind', before: 'constant', after: 'symmetric' },
      { path: 'torque.polarization', before: undefined, after: 0.6 },
      { path: 'torque.efficiency', before: 0.55, after: undefined },
    ])
  })
})

describe('what changed between two versions', () => {
  it('is told field by field in the reader’s units, choices in words', () => {
    const after = { name: 'Q-28 b', note: 'thicker', content: { device: { ...device, thickness: 1.6e-9, torque: { kind: 'symmetric' as const, polarization: 0.6 } } } }
    const changes = presetChanges(text, after, { 'device.thickness': 'Å' }).map(({ label, before, after: now }) => [label, plain(before), plain(now)])
    expect(changes).toEqual([
      ['Name of the preset', 'Q-28', 'Q-28 b'],
      ['Note', null, 'thicker'],
      ['Thickness', '14 Å', '16 Å'],
      ['Torque', 'constant in angle', 'symmetric junction'],
      ['Spin polarization', null, '0.6'],
      ['Torque efficiency', '0.55', null],
    ])
    expect(presetChanges(text, text)).toEqual([])
  })
})

describe('the search for presets', () => {
  const preset: Preset = { id: '01ARZ3NDEKTSV4RRFFQ69G5FAV', ...text, note: 'Low damping', owner: { id: '01ARZ3NDEKTSV4RRFFQ69G5FAW', name: 'Iris Vale' }, own: false, shared: true, archived: false, version: 2, updatedAt: '2026-01-01T00:00:00.000Z' }

  it('finds every word in name, note, owner or cell', () => {
    for (const search of ['', 'q-28', 'iris damping', ' LOW ']) expect(matchesPreset(preset, search), search).toBe(true)
    for (const search of ['q-29', 'iris high']) expect(matchesPreset(preset, search), search).toBe(false)
  })
})

describe('the cell in a sentence', () => {
  it('is called a cell unless its name says what it is', () => {
    expect(cellWords('Q-28')).toBe('cell Q-28')
    expect(cellWords('cell T-1')).toBe('cell T-1')
    expect(cellWords('Test device 4')).toBe('Test device 4')
    expect(cellWords('Cellar 3')).toBe('cell Cellar 3')
  })
})
