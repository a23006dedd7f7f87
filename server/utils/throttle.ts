import { createHash } from 'node:crypto'
import type { Redis } from 'ioredis'

/** Sign-in attempts of one account from one address before it has to wait, and for how long it is counted, s. */
export const SIGN_IN_ATTEMPTS = 8
export const SIGN_IN_WINDOW = 900

export interface ThrottleVerdict { allowed: boolean, retryAfterSeconds: number }

/**
 * Counts sign-in attempts per account and address. Counts before the password is checked, so that parallel guesses
 * count too; a success clears the count. When Redis does not answer it lets the attempt pass and says so once a call.
 */
export class SignInThrottle {
  constructor(private readonly redis: Redis, private readonly onFault: (error: unknown) => void) {}

  /** Counts an attempt and tells whether it may go on. */
  async take(account: string, address: string): Promise<ThrottleVerdict> {
    try {
      const key = keyOf(account, address)
      const count = await this.redis.incr(key)
      if (count === 1) await this.redis.expire(key, SIGN_IN_WINDOW)
      if (count <= SIGN_IN_ATTEMPTS) return { allowed: true, retryAfterSeconds: 0 }
      const left = await this.redis.ttl(key)
      // A key without an expiry is left by a crash between the two commands above.
      if (left < 0) await this.redis.expire(key, SIGN_IN_WINDOW)
      return { allowed: false, retryAfterSeconds: left > 0 ? left : SIGN_IN_WINDOW }
    }
    catch (error) {
      this.onFault(error)
      return { allowed: true, retryAfterSeconds: 0 }
    }
  }

  /** Forgets the attempts of an account that has signed in. */
  async clear(account: string, address: string): Promise<void> {
    try {
      await this.redis.del(keyOf(account, address))
    }
    catch (error) {
      this.onFault(error)
    }
  }
}

const keyOf = (account: string, address: string) =>
  `farpole:sign-in:${createHash('sha256').update(`${account}\n${address}`).digest('base64url')}`
