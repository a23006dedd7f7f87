import { ConnectionRefusedError, DatabaseError } from 'sequelize'
import { describe, expect, it } from 'vitest'
import { Pause, isPassing, patiently } from '../../workers/patience'
import { repeat } from '../../workers/repeat'

const never = new AbortController().signal
const refused = () => new ConnectionRefusedError(new Error('connect ECONNREFUSED'))
const failed = (errno: number) => new DatabaseError(Object.assign(new Error('refused'), { sql: '', errno }))

describe('Patience with the database', () => {
  it('tells an outage from a fault', () => {
    expect(isPassing(refused())).toBe(true)
    expect(isPassing(failed(1213))).toBe(true)
    expect(isPassing(failed(45_009))).toBe(true)
    expect(isPassing(failed(1062))).toBe(false)
    expect(isPassing(new TypeError('x is undefined'))).toBe(false)
  })

  it('tries again while the database is away', async () => {
    let tries = 0
    const answer = await patiently(async () => {
      tries++
      if (tries < 3) throw refused()
      return 'stored'
    }, never)
    expect([answer, tries]).toEqual(['stored', 3])
  })

  it('throws a fault at once, and an outage when it is told to stop', async () => {
    await expect(patiently(() => Promise.reject(failed(1062)), never)).rejects.toBeInstanceOf(DatabaseError)
    await expect(patiently(() => Promise.reject(refused()), AbortSignal.abort())).rejects.toBeInstanceOf(ConnectionRefusedError)
  })

  it('cuts a pause short', async () => {
    const pause = new Pause()
    const waited = pause.wait(60_000, never)
    pause.end()
    await waited
    await pause.wait(60_000, AbortSignal.abort())
  })
})

describe('Repetition', () => {
  it('goes on after a round that throws, and stops when it is told to', async () => {
    const stop = new AbortController()
    const errors: unknown[] = []
    let rounds = 0
    const { stopped } = repeat(1, stop.signal, async () => {
      rounds++
      if (rounds === 2) throw new Error('away')
      if (rounds === 4) stop.abort()
    }, error => errors.push(error))
    await stopped
    expect([rounds, errors.length]).toEqual([4, 1])
  })

  it('does the next round at once when poked, also while one is under way', async () => {
    const stop = new AbortController()
    let rounds = 0
    const repetition = repeat(60_000, stop.signal, async () => {
      rounds++
      if (rounds === 1) repetition.poke()
      if (rounds === 2) setImmediate(() => repetition.poke())
      if (rounds === 3) stop.abort()
      await Promise.resolve()
    }, () => undefined)
    await repetition.stopped
    expect(rounds).toBe(3)
  })
})
