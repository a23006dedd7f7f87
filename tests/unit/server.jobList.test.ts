import { describe, expect, it } from 'vitest'
import { JOB_SORTS } from '#shared/schemas/jobList'
import { fromCursor, searchTerms, toCursor } from '../../server/models/jobList'

const id = '01ARZ3NDEKTSV4RRFFQ69G5FAV'

describe('a cursor', () => {
  it.each(JOB_SORTS)('of %s comes back as the place that it names, and is of no other order', (sort) => {
    const place = { sort, value: 12_345, madeAt: Date.UTC(2026, 10, 28), id }
    expect(fromCursor(toCursor(place), sort)).toEqual(place)
    for (const other of JOB_SORTS.filter(known => known !== sort)) expect(fromCursor(toCursor(place), other), other).toBeNull()
  })

  it('is refused when it is damaged, or names what no row can have', () => {
    const good = toCursor({ sort: 'cpu', value: 1, madeAt: 2, id })
    for (const bad of ['', 'x', `${good}A`, `${good}=`, good.slice(1), ` ${good}`, good.toLowerCase()]) expect(fromCursor(bad, 'cpu'), bad).toBeNull()
    for (const text of [`cpu~-1~2~${id}`, `cpu~1e3~2~${id}`, `cpu~1~9999999999999999~${id}`, `cpu~9999999999999999~1~${id}`, `cpu~01~2~${id}`, `cpu~1~2~${id}' OR 1`, 'cpu~1~2~%']) {
      expect(fromCursor(Buffer.from(text).toString('base64url'), 'cpu'), text).toBeNull()
    }
  })
})

describe('the words of a search', () => {
  it('are each one once, in lower case, with numbers as they are kept', () => {
    expect(searchTerms('  Q-28  q-28 30\u202F000 Trials ')).toEqual(['q-28', '30000', 'trials'])
  })
})
