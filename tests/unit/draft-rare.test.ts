import { describe, expect, it } from 'vitest'
import { waveformCsv } from '#shared/physics/waveformCsv'
import type { JobSpec } from '#shared/schemas/job'
import { jobSpecSchema } from '#shared/schemas/job'
import { sameDevice } from '#shared/utils/device'
import { sentence } from '#shared/utils/sentence'
import { defaultDraft, DEFAULT_SPEC, deviceOf, draftFromSpec, draftSchema, readDraft, withDevice } from '~/utils/bench/draft'
import type { Draft } from '~/utils/bench/draft'

const draft = (choices: Partial<Draft['choices']>, texts: Record<string, string> = {}): Draft => {
  const start = defaultDraft(1)
  return { choices: { ...start.choices, ...choices }, texts: { ...start.texts, ...texts }, units: start.units }
}
const read = (one: Draft) => readDraft(one, DEFAULT_SPEC)
const plain = (text: string) => text.replace(/\u202F/g, ' ')
const full: JobSpec = jobSpecSchema.parse({
  ...DEFAULT_SPEC,
  device: {
    ...DEFAULT_SPEC.device, anisotropy: { kind: 'inPlane', interfaceAnisotropy: 0.4e-3 }, diameter: 100e-9, secondDiameter: 40e-9, shape: 'ellipsoid', uniaxialField: 4000,
    strayField: { x: 800, z: -1600 }, fieldLikeQuadratic: 8000, voltageAnisotropy: 40e-15, barrierThickness: 1e-9, halfVoltage: 0.5, pitch: 200e-9,
    materialTemperature: 300, magnetizationTemperature: 1200, anisotropyExponent: 2.2, tmrSlope: 1e-3, thermalResistance: 2e5,
  },
  write: { ...DEFAULT_SPEC.write, seriesResistance: 500, currentLimit: 1e-4, waveform: { kind: 'bipolar', reverseRatio: 0.4, reverseWidth: 3e-9, gap: 1e-9 } },
  start: { kind: 'fixedAngle', angle: 0.1, azimuth: 0.2 },
})

describe('what most leave out', () => {
  it('is not in the specification while it is empty', () => {
    expect(Object.keys(read(defaultDraft(1)).spec!.device).sort()).toEqual(Object.keys(DEFAULT_SPEC.device).sort())
    expect(read(defaultDraft(1)).spec).not.toHaveProperty('start')
    expect(read(defaultDraft(1)).spec!.write).not.toHaveProperty('waveform')
  })

  it('goes to the bench and comes back', () => {
    const back = read(draftFromSpec(full))
    expect(back.issues).toEqual([])
    expect(sameDevice(back.spec!.device, full.device)).toBe(true)
    expect(back.spec!.write.waveform).toMatchObject({ kind: 'bipolar', reverseRatio: 0.4 })
    expect(back.spec!.start).toMatchObject({ kind: 'fixedAngle' })
  })

  it('is cleared by a cell that has nothing of it', () => {
    const plainCell = withDevice(draftFromSpec(full), DEFAULT_SPEC.device)
    expect(sameDevice(deviceOf(plainCell)!, DEFAULT_SPEC.device)).toBe(true)
    expect(read(draftFromSpec(DEFAULT_SPEC, draftFromSpec(full))).spec).toEqual(read(draftFromSpec(DEFAULT_SPEC)).spec)
  })

  it('does not lose a draft that was kept before there was any', () => {
    const kept = JSON.parse(JSON.stringify(defaultDraft(1))) as { choices: Record<string, string> }
    for (const path of ['device.shape', 'write.waveform.kind', 'start.kind']) Reflect.deleteProperty(kept.choices, path)
    expect(draftSchema.parse(kept)).toEqual(defaultDraft(1))
  })

  it('stands in the sentence', () => {
    expect(plain(sentence(full))).toContain('100 × 40 nm in plane')
    expect(plain(sentence(full))).toContain('then −40 % for 3 ns')
    expect(plain(sentence(full))).toContain('started at 5.729578°')
  })
})

describe('a waveform from points', () => {
  const text = 'time (ps), voltage (mV)\n0, 0\n500, 400\n5000, 400\n5500; 0'.replace('; ', ', ')

  it('brings drive, width and points', () => {
    const { spec, issues } = read(draft({ 'write.waveform.kind': 'points' }, { 'write.waveform.points': text, 'write.width': 'nothing' }))
    expect(issues).toEqual([])
    expect(spec!.write.drive).toEqual({ kind: 'voltage', voltage: 0.4 })
    expect(spec!.write.width).toBeCloseTo(5e-9, 18)
    expect(spec!.write.waveform).toEqual({ kind: 'points', time: [0, 5e-10, 5e-9, 5.5e-9], amplitude: [0, 1, 1, 0] })
    expect(plain(sentence(spec!))).toContain('along 4 points')
    expect(read(draftFromSpec(spec!)).spec!.write).toEqual(spec!.write)
    expect(waveformCsv(spec!).split('\n')).toHaveLength(5)
  })

  it.each([
    ['', 'Row 1: Paste two columns'],
    ['time, voltage\n0, 1', 'Row 1: The first column needs a unit of time'],
    ['t (ns), V (kV)\n0, 1', 'Row 1: The second column needs its unit'],
    ['t (ns), V (V)\n0, 0\n1, one\n2, 1, 3\n1.5, 1', 'Row 3: “one” is not a number'],
    ['t (ns), V (V)\n0, 0\n1, one\n2, 1, 3\n1.5, 1', 'Row 4: Two columns are needed, here are 3.'],
    ['t (ns), V (V)\n0, 0\n2, 1\n\n# a note\n1, 0', 'Row 6: This time lies before the one above.'],
    ['t (ns), V (V)\n0, 0\n2, 0', 'Row 1: The drive is zero throughout.'],
  ])('says what is wrong with %j by row', (points, message) => {
    const { spec, issues, shown } = read(draft({ 'write.waveform.kind': 'points' }, { 'write.waveform.points': points }))
    expect(spec).toBeNull()
    expect(issues[0]).toMatchObject({ path: 'write.waveform.points', part: 'drive' })
    expect(issues[0]!.message).toContain(message)
    expect(plain(sentence(shown))).toContain('62 µA, 10 ns')
  })
})
