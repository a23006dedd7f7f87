import { describe, expect, it } from 'vitest'
import { jobSpecSchema } from '#shared/schemas/job'
import { cpuWords, jobTitle, pageTitle, presetWords, stateWords, timeWords } from '~/utils/jobWords'
import { safeNext } from '~/utils/next'
import { ProblemError, toProblemError } from '~/utils/problem'
import { keyNumbers, specSections } from '~/utils/specRows'
import { typesetPieces } from '~/utils/typeset'
import { WORKED_SET } from '../support/specs'

describe('specification in rows', () => {
  const variants = [
    {},
    { question: { kind: 'motion', paths: 5, after: 3e-9 } },
    { device: { ...WORKED_SET.device, anisotropy: { kind: 'interface', interfaceAnisotropy: 1.2e-3 }, torque: { kind: 'asymmetric', polarization: 0.5, asymmetry: 1.3 } } },
    { write: { ...WORKED_SET.write, drive: { kind: 'voltage', voltage: 0.4 } }, numerics: { seed: 3, step: { kind: 'fixed', step: 1e-12 } } },
  ]

  const numericLeaves = (value: unknown): number => typeof value === 'number' ? 1 : typeof value === 'object' && value !== null ? Object.values(value).reduce((sum: number, inner) => sum + numericLeaves(inner), 0) : 0

  it.each(variants)('leaves no number of the job out: %j', (change) => {
    const spec = jobSpecSchema.parse({ ...WORKED_SET, ...change })
    const { schemaVersion: _, ...shown } = spec
    const numeric = specSections(spec).flatMap(section => section.rows).filter(row => /^[\u2212\d]/.test(row.text))
    expect(numeric).toHaveLength(numericLeaves(shown))
  })

  it('adds the SI value only where the unit shown is not SI already', () => {
    const rows = specSections(jobSpecSchema.parse(WORKED_SET)).flatMap(section => section.rows)
    expect(rows.find(row => row.label === 'Diameter')).toEqual({ label: 'Diameter', symbol: 'd', text: '40\u202Fnm' })
    expect(rows.find(row => row.label === 'Anisotropy field')).toMatchObject({ text: '300\u202FmT', si: '238.7\u202FkA/m' })
    expect(rows.find(row => row.label === 'Temperature')).toMatchObject({ si: '300.0\u202FK' })
  })

  it('tells cells apart by either kind of anisotropy', () => {
    const { device } = jobSpecSchema.parse({ ...WORKED_SET, ...variants[2] })
    expect(keyNumbers(device).map(row => row.symbol)).toContain('K_i')
  })
})

describe('typesetting', () => {
  it('raises superscripts and lowers indices', () => {
    expect(typesetPieces('I_c0 is 1.33 × 10⁻³ A')).toEqual([
      { kind: 'text', text: 'I' }, { kind: 'sub', text: 'c0' }, { kind: 'text', text: ' is 1.33 × 10' }, { kind: 'sup', text: '−3' }, { kind: 'text', text: ' A' },
    ])
    expect(typesetPieces('θ_0')).toEqual([{ kind: 'text', text: 'θ' }, { kind: 'sub', text: '0' }])
  })

  it('loses nothing of plain text', () => {
    const text = 'How fast does Q_28 <b>switch</b>?'
    expect(typesetPieces(text).map(piece => piece.kind === 'sub' ? `_${piece.text}` : piece.text).join('')).toBe(text)
  })
})

describe('words of a job', () => {
  it('names the state, and how far a running one has come without rounding up to done', () => {
    expect(stateWords({ state: 'running', progress: 0.999 })).toBe('running, 99 %')
    expect(stateWords({ state: 'queued', progress: 0 })).toBe('waiting')
  })

  it('predicts CPU time until some is measured at the end', () => {
    expect(cpuWords({ state: 'running', cpuSeconds: 3, predictedCpuSeconds: 41 })).toBe('about 41\u202Fs')
    expect(cpuWords({ state: 'done', cpuSeconds: 38, predictedCpuSeconds: 41 })).toBe('38\u202Fs')
  })

  it('tells times by how long ago they are', () => {
    const now = new Date(2026, 10, 3, 15, 0)
    expect(timeWords(new Date(2026, 10, 3, 14, 2).toISOString(), now)).toBe('14:02')
    expect(timeWords(new Date(2026, 10, 2, 9, 5).toISOString(), now)).toBe('yesterday 09:05')
    expect(timeWords(new Date(2025, 10, 2, 9, 5).toISOString(), now)).toBe('2 Nov 2025, 09:05')
  })
})

describe('where to go after signing in', () => {
  it.each(['/jobs/01ABC?x=1', '/bench'])('keeps %s', path => expect(safeNext(path)).toBe(path))
  it.each(['//example.org', '/\\example.org', 'https://example.org', '/signin?next=/x', undefined, ['/jobs']])('refuses %s', path => expect(safeNext(path)).toBe('/'))
})

describe('problems', () => {
  const failed = (status: number, data: unknown, headers = {}) => Object.assign(new Error('x'), { name: 'FetchError', data, response: status === 0 ? undefined : new Response(null, { status, headers }) })

  it('keeps what the server says, field by field', () => {
    const problem = { type: 'about:blank', title: 'Not valid', status: 422, detail: 'Two fields.', errors: [{ pointer: '/email', detail: 'Enter an e-mail address.' }] }
    const error = toProblemError(failed(422, problem, { 'retry-after': '7' }))
    expect(error).toBeInstanceOf(ProblemError)
    expect(error).toMatchObject({ message: 'Two fields.', status: 422, retryAfterSeconds: 7 })
    expect(error instanceof ProblemError && error.at('/email')).toBe('Enter an e-mail address.')
    expect(error instanceof ProblemError && error.at('/password')).toBeUndefined()
  })

  it('has words for a reply that is no problem and for no reply', () => {
    expect(toProblemError(failed(503, '<html>'))).toMatchObject({ status: 503, message: expect.stringContaining('not available') })
    expect(toProblemError(failed(0, undefined))).toMatchObject({ status: 0, message: expect.stringContaining('could not be reached') })
  })

  it('leaves faults of ours as they are', () => {
    const fault = new TypeError('x')
    expect(toProblemError(fault)).toBe(fault)
  })
})

describe('the title of a tab', () => {
  const job = { state: 'running' as const, progress: 0.629, sentence: 'How fast does cell Q-28 switch?' }

  it('says how a job stands', () => {
    expect(jobTitle(job)).toBe('62 % · How fast does cell Q-28 switch?')
    expect(jobTitle({ ...job, state: 'done', progress: 1 })).toBe('done · How fast does cell Q-28 switch?')
    expect(jobTitle({ ...job, state: 'queued', progress: 0 })).toBe('waiting · How fast does cell Q-28 switch?')
  })

  it('counts on other pages what is still running', () => {
    expect(pageTitle('Presets', 2)).toBe('2 running · Presets · Farpole')
    expect(pageTitle('Presets', 0)).toBe('Presets · Farpole')
    expect(pageTitle(undefined, 0)).toBe('Farpole')
  })
})

describe('the preset of a job', () => {
  it('is named with its version, and whether the cell differs from it', () => {
    expect(presetWords({ id: '01ARZ3NDEKTSV4RRFFQ69G5FAV', name: 'Q-28', version: 4, changed: false })).toBe('preset Q-28 v4')
    expect(presetWords({ id: '01ARZ3NDEKTSV4RRFFQ69G5FAV', name: 'Q-28', version: 4, changed: true })).toBe('preset Q-28 v4 · changed')
  })
})
