import { describe, expect, it } from 'vitest'
import type { JobSummary } from '#shared/schemas/api'
import { confirmation, mayDo, rowResult, summaryWords } from '~/utils/jobs/bulk'
import { readColumns } from '~/utils/jobs/columns'
import { ariaSort, changed, dayBounds, dayOf, fits, nextSort, readListState, writeListState } from '~/utils/jobs/listState'
import { beforeWords, etaWords } from '~/utils/jobs/outlookWords'
import { extended, kept, moved, nothingSelected, pageToggled, toggled } from '~/utils/jobs/selection'
import { summaryOf, withOutlook } from '~/utils/jobNews'

const OWNER = '01ARZ3NDEKTSV4RRFFQ69G5FAV'
const job = (over: Partial<JobSummary> = {}): JobSummary => ({
  id: '01ARZ3NDEKTSV4RRFFQ69G5FA0', sentence: 'How fast does cell Q-28 switch, over 30\u202F000 trials?', question: 'switching', state: 'done', owner: { id: OWNER, name: 'Ansel Moor' }, own: true,
  createdAt: '2026-11-28T10:00:00.000Z', startedAt: null, finishedAt: null, predictedCpuSeconds: 12, cpuSeconds: 11, progress: 1,
  headline: 'It switches in 2.3 ns.', error: null, preset: null, waiting: null, eta: null, ...over,
})
const plain = (text: string | null) => text?.replace(/\s/g, ' ')

describe('the state of the list in the address', () => {
  it('comes back as it went, without what is so anyway', () => {
    const state = { q: 'Q-28 far', state: 'open', owner: OWNER, question: 'motion', from: '2026-11-28T00:00:00.000Z', sort: 'cpu' } as const
    expect(writeListState(readListState(writeListState(state)))).toEqual(state)
    expect(writeListState({ sort: '-created' })).toEqual({})
  })

  it('leaves out what is damaged, doubled or unknown', () => {
    expect(readListState({ state: 'gone', owner: '<b>', sort: ['cpu', 'state'], q: '   ', from: 'today', page: '3', question: 'switching' })).toEqual({ question: 'switching' })
  })

  it('starts at the first page after a change', () => {
    expect(changed({ sort: 'cpu', cursor: 'abc', q: 'x' }, { state: 'done' })).toEqual({ sort: 'cpu', q: 'x', state: 'done' })
    expect(changed({ q: 'x' }, { q: undefined })).toEqual({})
  })

  it('turns a column round on the second press', () => {
    expect([nextSort('state', '-created'), nextSort('-created', '-created'), nextSort('created', '-created')]).toEqual(['-created', 'created', '-created'])
    expect([ariaSort('-cpu', 'cpu'), ariaSort('cpu', 'cpu'), ariaSort('state', 'cpu')]).toEqual(['descending', 'ascending', 'none'])
  })

  it('turns days of the calendar into instants and back, the last day included', () => {
    const { from, to } = dayBounds('2026-11-28')!
    expect(Date.parse(to) - Date.parse(from)).toBe(86_400_000)
    expect([dayOf(from), dayOf(to, true)]).toEqual(['2026-11-28', '2026-11-28'])
    expect([dayBounds(''), dayBounds('0000-01-01'), dayBounds('28.11.2026')]).toEqual([undefined, undefined, undefined])
  })
})

describe('news in a filtered list', () => {
  it('are let through as the server would', () => {
    const cases: [Parameters<typeof fits>[0], boolean][] = [
      [{}, true], [{ state: 'done' }, true], [{ state: 'open' }, false], [{ owner: OWNER.replace('V', 'W') }, false], [{ question: 'motion' }, false], [{ preset: OWNER }, false],
      [{ q: 'q-28 FAST' }, true], [{ q: '30000' }, true], [{ q: '2.3' }, true], [{ q: 'q-28 slow' }, false],
      [{ from: '2026-11-28T10:00:00Z' }, true], [{ to: '2026-11-28T10:00:00Z' }, false],
    ]
    for (const [state, expected] of cases) expect(fits(state, job()), JSON.stringify(state)).toBe(expected)
  })

  it('keep what was said of waiting while the job is open, and drop it when it has begun or ended', () => {
    const eta = { low: '2026-11-28T10:00:10.000Z', high: '2026-11-28T10:00:20.000Z' }
    const waiting = { reason: 'busy' as const, words: 'All slots are busy.', jobsBefore: 1, cpuSecondsBefore: 3 }
    const known = job({ state: 'queued', waiting, eta })
    const { own: _own, waiting: _waiting, eta: _eta, ...news } = job({ state: 'running', progress: 0.2 })
    expect(summaryOf(news, known, OWNER)).toMatchObject({ own: true, waiting: null, eta, progress: 0.2 })
    expect(summaryOf({ ...news, state: 'done' }, known, 'x')).toMatchObject({ own: false, waiting: null, eta: null })
    expect(withOutlook(job({ state: 'running' }), { id: known.id, waiting, eta })).toMatchObject({ waiting: null, eta })
    expect(withOutlook(job(), { id: known.id, waiting, eta })).toMatchObject({ waiting: null, eta: null })
  })
})

describe('selecting rows', () => {
  const rows = ['a', 'b', 'c', 'd', 'e']
  const ids = ({ ids }: { ids: ReadonlySet<string> }) => [...ids].sort().join('')

  it('chooses single rows and ranges from the last one chosen, in both directions', () => {
    const c = toggled(nothingSelected, 'c')
    expect(ids(extended(c, rows, 'e'))).toBe('cde')
    expect(ids(extended(extended(c, rows, 'e'), rows, 'b'))).toBe('bcde')
    expect(ids(toggled(c, 'c'))).toBe('')
    expect(ids(extended(nothingSelected, rows, 'd'))).toBe('d')
    expect(ids(extended(c, rows, 'gone'))).toBe('c')
  })

  it('chooses the page and lets it go again', () => {
    const all = pageToggled(toggled(nothingSelected, 'b'), rows)
    expect(ids(all)).toBe('abcde')
    expect(ids(pageToggled(all, rows))).toBe('')
    expect(ids(pageToggled(nothingSelected, []))).toBe('')
  })

  it('lets go of rows that have left, and of nothing else', () => {
    const chosen = extended(toggled(nothingSelected, 'b'), rows, 'd')
    expect(kept(chosen, [...rows, 'f'])).toBe(chosen)
    expect(kept(chosen, ['a', 'c', 'd'])).toEqual({ ids: new Set(['c', 'd']), anchor: null })
  })

  it('moves between rows and stays in the list', () => {
    expect([moved('ArrowDown', rows, 'a'), moved('ArrowUp', rows, 'a'), moved('End', rows, 'b'), moved('PageUp', rows, 'd'), moved('ArrowDown', rows, 'e')]).toEqual(['b', 'a', 'e', 'a', 'e'])
    expect([moved('x', rows, 'a'), moved('ArrowDown', [], null), moved('ArrowDown', rows, null)]).toEqual([null, null, 'a'])
  })
})

describe('commands for many jobs', () => {
  const actor = { mayWrite: true, isAdmin: false }

  it('meet the jobs that they can meet', () => {
    expect(mayDo('cancel', job({ state: 'running' }), actor)).toBe(true)
    expect(mayDo('cancel', job(), actor)).toBe(false)
    expect(mayDo('delete', job({ own: false }), actor)).toBe(false)
    expect(mayDo('delete', job({ own: false }), { ...actor, isAdmin: true })).toBe(true)
    expect(mayDo('rerun', job({ own: false }), actor)).toBe(true)
    expect(mayDo('rerun', job(), { mayWrite: false, isAdmin: false })).toBe(false)
  })

  it('say before how many they meet, what it costs and what is left out', () => {
    const chosen = [job(), job({ state: 'running' }), job({ own: false })]
    expect(confirmation('delete', chosen, actor)).toMatchObject({ title: 'Delete one job?', sentence: job().sentence, leftOut: '2 of the 3 selected are left as they are: not ended yet or not yours.' })
    expect(plain(confirmation('rerun', chosen, actor).effect)).toContain('About 36 s of CPU time')
    expect(confirmation('rerun', chosen, actor)).toMatchObject({ title: 'Run again 3 jobs?', sentence: null, leftOut: null })
  })

  it('say afterwards what became of each and of all', () => {
    const problem = { type: 'quota-exceeded', title: 'Too dear.', status: 409, leftCpuSeconds: 4 }
    expect(plain(rowResult('rerun', { id: OWNER, ok: false, problem }).text)).toBe('not queued again: your quota has 4.0 s left')
    expect(rowResult('rerun', { id: OWNER, ok: true, newId: OWNER })).toEqual({ ok: true, text: 'queued again', newId: OWNER })
    expect(summaryWords('delete', [{ id: OWNER, ok: true }, { id: OWNER, ok: false, problem }])).toBe('One job deleted. One was not; the reason is in the row.')
  })
})

describe('words about the end', () => {
  const now = new Date('2026-11-28T10:00:00Z')
  const eta = (low: number, high: number) => ({ low: new Date(now.getTime() + low * 1000).toISOString(), high: new Date(now.getTime() + high * 1000).toISOString() })

  it('are as coarse as the range deserves', () => {
    expect([eta(21, 48), eta(0.2, 3), eta(130, 400), eta(4000, 9000), eta(-9, -1)].map(range => plain(etaWords(range, now)) ?? null))
      .toEqual(['20–50 s', 'within 3 s', '2 m to 6 m 30 s', '1 h 5 m to 2 h 30 m', null])
  })

  it('say what stands before a job', () => {
    const waiting = { reason: 'busy' as const, words: '', jobsBefore: 2, cpuSecondsBefore: 41 }
    expect(plain(beforeWords(waiting))).toBe('2 jobs, about 40 s of CPU time, before it')
    expect(beforeWords({ ...waiting, jobsBefore: 0 })).toBeNull()
  })
})

describe('remembered columns', () => {
  it('are those that there are, in their order', () => {
    expect(readColumns('cpu.who.colour')).toEqual(['who', 'cpu'])
    expect(readColumns('none')).toEqual([])
    expect(readColumns(undefined)).toContain('ready')
  })
})
