import RedisMock from 'ioredis-mock'
import { beforeEach, describe, expect, it } from 'vitest'
import { THROTTLES, Throttle } from '../../server/utils/throttle'

const { attempts: SIGN_IN_ATTEMPTS, windowSeconds: SIGN_IN_WINDOW } = THROTTLES['sign-in']
const redis = new RedisMock()
const faults: unknown[] = []
const throttle = new Throttle(redis, error => faults.push(error))

const use = async (account: string, address: string, times: number) => {
  const verdicts = []
  for (let k = 0; k < times; k++) verdicts.push(await throttle.take('sign-in', account, address))
  return verdicts
}

describe('the throttle', () => {
  beforeEach(async () => {
    await redis.flushall()
    faults.length = 0
  })

  it('lets a number of attempts pass, then names the time to wait', async () => {
    const verdicts = await use('a@example.org', '10.0.0.1', SIGN_IN_ATTEMPTS + 1)
    expect(verdicts.slice(0, SIGN_IN_ATTEMPTS).every(verdict => verdict.allowed)).toBe(true)
    const last = verdicts[SIGN_IN_ATTEMPTS]!
    expect(last.allowed).toBe(false)
    expect(last.retryAfterSeconds).toBeGreaterThan(SIGN_IN_WINDOW - 5)
    expect(last.retryAfterSeconds).toBeLessThanOrEqual(SIGN_IN_WINDOW)
  })

  it('counts parallel attempts one by one', async () => {
    const verdicts = await Promise.all(Array.from({ length: 50 }, () => throttle.take('sign-in', 'a@example.org', '10.0.0.1')))
    expect(verdicts.filter(verdict => verdict.allowed)).toHaveLength(SIGN_IN_ATTEMPTS)
  })

  it('keeps accounts and addresses apart, and holds neither in clear', async () => {
    await use('a@example.org', '10.0.0.1', SIGN_IN_ATTEMPTS + 1)
    expect((await throttle.take('sign-in', 'a@example.org', '10.0.0.2')).allowed).toBe(true)
    expect((await throttle.take('sign-in', 'b@example.org', '10.0.0.1')).allowed).toBe(true)
    expect((await redis.keys('*')).join()).not.toMatch(/example|10\.0/)
  })

  it('counts each kind of attempt by itself', async () => {
    await use('a@example.org', '10.0.0.1', SIGN_IN_ATTEMPTS + 1)
    expect((await throttle.take('reset', 'a@example.org', '10.0.0.1')).allowed).toBe(true)
  })

  it('refuses with the time to wait', async () => {
    await use('a@example.org', '10.0.0.1', SIGN_IN_ATTEMPTS)
    const refusal = throttle.pass('sign-in', 'a@example.org', '10.0.0.1')
    await expect(refusal).rejects.toMatchObject({ type: 'too-many-requests', headers: { 'Retry-After': String(SIGN_IN_WINDOW) } })
  })

  it('forgets an account that has signed in', async () => {
    await use('a@example.org', '10.0.0.1', SIGN_IN_ATTEMPTS)
    await throttle.clear('sign-in', 'a@example.org', '10.0.0.1')
    expect((await throttle.take('sign-in', 'a@example.org', '10.0.0.1')).allowed).toBe(true)
  })

  it('gives a count that lost its expiry a new one', async () => {
    await use('a@example.org', '10.0.0.1', SIGN_IN_ATTEMPTS + 1)
    const [key] = await redis.keys('*')
    await redis.persist(key!)
    expect(await throttle.take('sign-in', 'a@example.org', '10.0.0.1')).toEqual({ allowed: false, retryAfterSeconds: SIGN_IN_WINDOW })
    expect(await redis.ttl(key!)).toBeGreaterThan(0)
  })

  it('lets everyone pass, and says so, when Redis is away', async () => {
    const away = new RedisMock({ lazyConnect: true, enableOfflineQueue: false, host: 'away' })
    away.disconnect()
    const open = new Throttle(away, error => faults.push(error))
    expect(await open.take('sign-in', 'a@example.org', '10.0.0.1')).toEqual({ allowed: true, retryAfterSeconds: 0 })
    expect(faults).toHaveLength(1)
  })
})
