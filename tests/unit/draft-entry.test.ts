import { describe, expect, it } from 'vitest'
import { parseQuantity } from '#shared/utils/quantity'
import { nudged, readEntry, siLine, typedNumber, typedQuantity, withoutUnit } from '~/utils/bench/entry'
import { fieldAt, FIELDS } from '~/utils/bench/fields'
import { readyWords } from '~/utils/bench/ready'

const plain = (text: string) => text.replaceAll('\u202F', ' ')

describe('an entry', () => {
  it.each([
    ['device.damping', '0.008', '1', 1, '0.0081'],
    ['device.saturationMagnetization', '1 050', 'kA/m', 1, '1 150'],
    ['device.anisotropy.anisotropyField', '3 400', 'Oe', -1, '3 300'],
    ['device.anisotropy.anisotropyField', '3400 Oe', 'mT', 1, '3 500 Oe'],
    ['device.thickness', '1.4', 'nm', 1, '1.5'],
    ['device.thickness', '1.40', 'nm', 1, '1.50'],
    ['device.diameter', '28', 'nm', -1, '27'],
    ['write.drive.current', '62 µA', 'µA', 1, '63 µA'],
    ['environment.appliedField.z', '0', 'mT', -1, '−1'],
    ['environment.appliedField.z', '−5', 'mT', -1, '−5.1'],
    ['question.trials', '10 000', undefined, 1, '11 000'],
    ['question.trials', '10', undefined, -1, '10'],
    ['numerics.seed', '5', undefined, 1, '6'],
    ['device.damping', '2', '1', 1, '2'],
  ] as const)('%s: %j in %s moved by %i is %j', (path, text, unit, direction, next) => {
    expect(nudged(fieldAt(path), text, unit, direction)).toBe(next)
  })

  it('moves ten steps at once, and not at all from what is no number', () => {
    expect(nudged(fieldAt('device.diameter'), '28', 'nm', 1, true)).toBe('38')
    expect(nudged(fieldAt('device.diameter'), 'wide', 'nm', 1)).toBeNull()
    expect(nudged(fieldAt('device.label'), '28', undefined, 1)).toBeNull()
  })

  it('never leaves its limits however often it is moved', () => {
    for (const field of FIELDS) {
      if (field.kind === 'name' || field.kind === 'points') continue
      const unit = field.kind === 'quantity' ? field.unit : undefined
      for (const direction of [1, -1] as const) {
        let text = '7'
        for (let n = 0; n < 200; n++) text = nudged(field, text, unit, direction, true) ?? text
        expect(readEntry(field, text, unit).ok, `${field.path} ${text}`).toBe(true)
      }
    }
  })

  it.each([['3400 Oe', '3400'], ['1 050', '1 050'], ['3.4e3', '3.4e3'], ['2 × 10^3 ps', '2 × 10^3'], ['−5mT', '−5'], ['abc', 'abc'], ['', '']])('%j without its unit is %j', (text, bare) => {
    expect(withoutUnit(text)).toBe(bare)
  })

  it.each([1050, 0.008, 3.4e-7, 62, 10_000, 0, -5.25, 4_294_967_295, 1e-12])('%d is typed so that it reads back', (value) => {
    const parsed = parseQuantity(typedNumber(value), 'number')
    expect(parsed.ok && parsed.value).toBe(value)
  })

  it('types quantities in the unit asked', () => {
    expect(typedQuantity(1.05e6, 'magnetization', 'kA/m')).toBe('1 050')
    expect(typedQuantity(358.15, 'temperature', '°C')).toBe('85')
  })

  it('says other units and SI of what was typed', () => {
    expect(plain(siLine(fieldAt('device.anisotropy.anisotropyField'), '3 400', 'Oe'))).toBe('= 0.3400 T · 270.6 kA/m. Effective, shape included.')
    expect(plain(siLine(fieldAt('device.thickness'), '1.4', 'nm'))).toBe('= 14.00 Å')
    expect(plain(siLine(fieldAt('environment.temperature'), '85', '°C'))).toContain('= 358.1 K')
    expect(siLine(fieldAt('device.thickness'), 'x', 'nm')).toBe('')
    expect(siLine(fieldAt('question.trials'), '10', undefined)).toBe('')
  })
})

describe('the wait', () => {
  it('is a range, longer with more before it', () => {
    expect(plain(readyWords(41, { waitingJobs: 2, waitingCpuSeconds: 40, slots: 2 }))).toBe('ready in 20 s to 1 m · 2 jobs before yours')
    expect(plain(readyWords(2, { waitingJobs: 0, waitingCpuSeconds: 0, slots: 2 }))).toBe('ready in 2–4 s · nothing before yours')
    expect(readyWords(2, { waitingJobs: 1, waitingCpuSeconds: 9, slots: 0 })).toContain('no worker')
  })
})
