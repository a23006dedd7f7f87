import { describe, expect, it } from 'vitest'
import { afterServing, nextContender, room } from '../../server/queue/fairness'

describe('Room for chunks', () => {
  it('is one for each free slot and one ahead for every other slot, at least one', () => {
    expect(room({ slots: 4, running: 0, queued: 0 })).toBe(6)
    expect(room({ slots: 4, running: 4, queued: 0 })).toBe(2)
    expect(room({ slots: 4, running: 3, queued: 1 })).toBe(2)
    expect(room({ slots: 1, running: 1, queued: 0 })).toBe(1)
    expect(room({ slots: 1, running: 1, queued: 1 })).toBe(0)
  })

  it('is never negative', () => {
    expect(room({ slots: 0, running: 3, queued: 5 })).toBe(0)
    expect(room({ slots: 2, running: 2, queued: 9 })).toBe(0)
  })
})

/** Hands out chunks one by one as the dispatcher does, one in flight at a time; answers whose they were. */
function serve(users: { userId: string, virtualTime: number, cost: number, arrives: number }[], rounds: number): string[] {
  let now = 0
  return Array.from({ length: rounds }, (_, round) => {
    const next = nextContender(users.filter(user => user.arrives <= round), now)
    if (!next) return ''
    now = Math.max(next.virtualTime, now)
    next.virtualTime = afterServing(next.virtualTime, now, next.cost)
    return next.userId
  })
}

const share = (order: string[], userId: string) => order.filter(id => id === userId).length / order.length

describe('Order between users', () => {
  it('serves a newcomer next, however much another one has queued', () => {
    const order = serve([{ userId: 'a', virtualTime: 0, cost: 3e6, arrives: 0 }, { userId: 'b', virtualTime: 0, cost: 3e6, arrives: 1000 }], 1100)
    expect(order.slice(0, 1000).every(id => id === 'a')).toBe(true)
    expect(order.slice(1000, 1002)).toContain('b')
    expect(share(order.slice(1000), 'b')).toBeCloseTo(0.5, 1)
  })

  it('gives an idle time no credit', () => {
    const order = serve([{ userId: 'busy', virtualTime: 5e9, cost: 3e6, arrives: 0 }, { userId: 'idle', virtualTime: 0, cost: 3e6, arrives: 100 }], 300)
    expect(share(order.slice(100), 'idle')).toBeLessThan(0.52)
  })

  it('shares CPU time, not the number of chunks', () => {
    const order = serve([{ userId: 'small', virtualTime: 0, cost: 1e6, arrives: 0 }, { userId: 'large', virtualTime: 0, cost: 4e6, arrives: 0 }], 1000)
    expect(share(order, 'small')).toBeCloseTo(0.8, 1)
  })

  it('is even between ten users: Jain’s index at least 0.99', () => {
    const users = Array.from({ length: 10 }, (_, k) => ({ userId: `u${k}`, virtualTime: k * 1e8, cost: 2e6 + k * 3e5, arrives: 0 }))
    // Those who start behind catch up first: shares are compared from then on.
    const order = serve(users, 20_000).slice(10_000)
    const time = users.map(({ userId, cost }) => order.filter(id => id === userId).length * cost)
    const sum = time.reduce((a, b) => a + b, 0)
    expect(sum ** 2 / (10 * time.reduce((a, b) => a + b * b, 0))).toBeGreaterThan(0.99)
  })

  it('has nobody to serve when nobody waits', () => {
    expect(nextContender([], 0)).toBeUndefined()
  })
})
