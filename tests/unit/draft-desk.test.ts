import { beforeEach, describe, expect, it, vi } from 'vitest'
import { nextTick, reactive } from 'vue'
import type { JobSpec } from '#shared/schemas/job'
import { openDesk, type Pin } from '~/utils/bench/desk'
import { DEFAULT_SPEC } from '~/utils/bench/draft'
import { ProblemError } from '~/utils/problem'

const kept = new Map<string, string>()
vi.stubGlobal('localStorage', { getItem: (key: string) => kept.get(key) ?? null, setItem: (key: string, value: string) => kept.set(key, value) })

let submit: (spec: JobSpec, key: string, pin: Pin | null) => Promise<{ id: string }>
const open = (userId = 'someone') => reactive(openDesk({ userId: () => userId, submit: (spec, key, pin) => submit(spec, key, pin) }))
const refuse = (problem: Partial<ProblemError['problem']>) => new ProblemError({ type: 'about:blank', title: 'No', status: 422, ...problem })

describe('the bench', () => {
  let sent: { spec: JobSpec, key: string }[]
  beforeEach(() => {
    kept.clear()
    sent = []
    submit = async (spec, key) => {
      sent.push({ spec, key })
      return { id: 'job' }
    }
  })

  it('queues exactly what is shown', async () => {
    const draft = open()
    draft.type('write.drive.current', '32 uA')
    draft.type('numerics.seed', '5')
    expect(await draft.queue()).toBe('job')
    expect(sent[0]!.spec).toEqual(draft.spec)
    expect(sent[0]!.spec.write.drive).toEqual({ kind: 'current', current: 32e-6 })
    expect(sent[0]!.spec.numerics.seed).toBe(5)
  })

  it('keeps its key while the same body is tried again, over a reload too, and takes a new one after', async () => {
    submit = async (spec, key) => {
      sent.push({ spec, key })
      if (sent.length < 3) throw refuse({ status: 0 })
      return { id: 'job' }
    }
    const draft = open()
    expect(await draft.queue()).toBeNull()
    expect(draft.refusal).toEqual({ title: refuse({ status: 0 }).message, priceCpuSeconds: null, leftCpuSeconds: null, capCpuSeconds: null })
    const again = open()
    expect(again.restore()).toBe(true)
    await again.queue()
    await again.queue()
    expect(new Set(sent.map(({ key }) => key)).size).toBe(1)
    await again.queue()
    expect(sent[3]!.key).not.toBe(sent[0]!.key)
    again.type('numerics.seed', '6')
    submit = async () => {
      throw refuse({ status: 0 })
    }
    await again.queue()
    const first = again.attempt!.key
    again.type('numerics.seed', '7')
    await again.queue()
    expect(again.attempt!.key).not.toBe(first)
  })

  it('sends nothing that makes no sense, nor twice at once', async () => {
    const draft = open()
    draft.type('device.damping', 'some')
    expect(await draft.queue()).toBeNull()
    draft.type('device.damping', '0.01')
    await Promise.all([draft.queue(), draft.queue()])
    expect(sent).toHaveLength(1)
  })

  it('shows what the server says at its entry, opens the part, and takes it back when the entry changes', async () => {
    submit = async () => {
      throw refuse({ errors: [{ pointer: '/write/width', detail: 'Too long.' }] })
    }
    const draft = open()
    expect(await draft.queue()).toBeNull()
    expect(draft.issueOf('write.width')?.message).toBe('Too long.')
    expect(draft.open).toBe('drive')
    draft.type('write.width', '9')
    expect(draft.issues).toEqual([])
  })

  it('says the price and what is left where the quota refuses, until something changes', async () => {
    submit = async () => {
      throw refuse({ predictedCpuSeconds: 40, leftCpuSeconds: 12 })
    }
    const draft = open()
    await draft.queue()
    expect(draft.refusal).toMatchObject({ priceCpuSeconds: 40, leftCpuSeconds: 12 })
    draft.type('question.trials', '100')
    expect(draft.refusal).toBeNull()
  })

  it('keeps what was typed as it was typed, faults included', () => {
    const draft = open()
    draft.type('device.saturationMagnetization', '1 060 emu/cm3')
    draft.type('device.damping', '0.0o8')
    draft.keep()
    const later = open()
    expect(later.restore()).toBe(true)
    expect(later.draft.texts['device.saturationMagnetization']).toBe('1 060 emu/cm3')
    expect(later.draft.units['device.saturationMagnetization']).toBe('emu/cm3')
    expect(later.draft.texts['device.damping']).toBe('0.0o8')
    expect(later.issueOf('device.damping')).toBeDefined()
    expect(open('another').restore()).toBe(false)
    kept.set([...kept.keys()][0]!, '{"version":9}')
    expect(open().restore()).toBe(false)
  })

  it('keeps the number and lets the unit go when another is chosen', () => {
    const draft = open()
    draft.type('device.anisotropy.anisotropyField', '3400 Oe')
    draft.chooseUnit('device.anisotropy.anisotropyField', 'mT')
    expect(draft.draft.texts['device.anisotropy.anisotropyField']).toBe('3400')
    expect(draft.draft.units['device.anisotropy.anisotropyField']).toBe('mT')
  })

  it('says where the cell came from, and gives back what was there', async () => {
    const draft = open()
    draft.type('write.width', '7')
    draft.loadPreset({ id: 'p', name: 'Wide', version: 4, content: { device: { ...DEFAULT_SPEC.device, diameter: 45e-9 } } })
    expect(draft.originWords).toBe('preset Wide v4')
    expect(draft.draft.texts['write.width']).toBe('7')
    draft.nudge('device.diameter', 1, false)
    await nextTick()
    expect(draft.originWords).toBe('preset Wide v4 · changed')
    draft.bringBack()
    expect(draft.draft.texts['device.diameter']).toBe('28')
    draft.loadSpec({ id: 'j', spec: { ...DEFAULT_SPEC, numerics: { ...DEFAULT_SPEC.numerics, seed: 3 } } })
    expect(draft.originWords).toBe('from an earlier job')
    expect(draft.spec!.numerics.seed).not.toBe(3)
  })

  describe('started from a preset', () => {
    const preset = { id: 'p', name: 'Wide', version: 4, content: { device: { ...DEFAULT_SPEC.device, diameter: 45e-9 } } }

    it('names the version with the job, over a reload too, and changed as it may be', async () => {
      const pins: unknown[] = []
      submit = async (spec, key, pin) => {
        pins.push(pin)
        return { id: 'job' }
      }
      const draft = open()
      await draft.queue()
      draft.loadPreset(preset)
      draft.type('device.damping', '0.02')
      draft.keep()
      const again = open()
      again.restore()
      expect(again.originWords).toBe('preset Wide v4 · changed')
      await again.queue()
      expect(pins).toEqual([null, { id: 'p', version: 4 }])
    })

    it('takes a new key once it is asked from another version', async () => {
      submit = async (spec, key) => {
        sent.push({ spec, key })
        throw refuse({ status: 0 })
      }
      const draft = open()
      draft.loadPreset(preset)
      await draft.queue()
      draft.recognise({ ...preset, version: 5 })
      await draft.queue()
      expect(sent[0]!.spec).toEqual(sent[1]!.spec)
      expect(sent[0]!.key).not.toBe(sent[1]!.key)
    })

    it('lets the pin go and keeps the numbers where the preset is not there any more', async () => {
      submit = async () => {
        throw refuse({ errors: [{ pointer: '/preset', detail: 'There is no such preset for you.' }] })
      }
      const draft = open()
      draft.loadPreset(preset)
      expect(await draft.queue()).toBeNull()
      expect(draft.pin).toBeNull()
      expect(draft.issues).toEqual([])
      expect(draft.refusal?.title).toMatch(/not there for you any more/)
      expect(draft.spec!.device.diameter).toBe(45e-9)
    })

    it('keeps what was typed where the note of its origin is of an older shape', () => {
      const draft = open()
      draft.type('device.damping', '0.033')
      draft.keep()
      const key = [...kept.keys()][0]!
      kept.set(key, JSON.stringify({ ...JSON.parse(kept.get(key)!), origin: { kind: 'preset', name: 'Q-28' } }))
      const later = open()
      expect(later.restore()).toBe(true)
      expect(later.draft.texts['device.damping']).toBe('0.033')
      expect(later.originWords).toBe('typed on the bench')
    })
  })

  it('marks what physics refuses', () => {
    const draft = open()
    draft.setPhysicsIssue({ path: ['environment', 'appliedField'], message: 'No such state.' })
    expect(draft.issues).toMatchObject([{ path: null, part: 'environment' }])
    draft.setPhysicsIssue(null)
    expect(draft.issues).toEqual([])
  })
})
