import { createHash } from 'node:crypto'
import type { Redis } from 'ioredis'
import { HttpProblem } from './problems'

/** What is counted, how often it may be done before one has to wait, and for how long it is counted, s. */
export const THROTTLES = {
  /** Sign-in attempts of one account from one address. */
  'sign-in': { attempts: 8, windowSeconds: 900 },
  /** Wishes for a new password for one account from one address, and for whatever accounts from one address. */
  'reset': { attempts: 5, windowSeconds: 900 },
  'resets': { attempts: 200, windowSeconds: 900 },
  /** Looks at mailed links and uses of them from one address, behind which a whole class may sit. */
  'link': { attempts: 600, windowSeconds: 900 },
  'link-use': { attempts: 200, windowSeconds: 900 },
  /** Changes of one user's password. */
  'password': { attempts: 8, windowSeconds: 900 },
  /** Invitations of one admin. */
  'invite': { attempts: 60, windowSeconds: 3600 },
} as const
export type Throttled = keyof typeof THROTTLES

export interface ThrottleVerdict { allowed: boolean, retryAfterSeconds: number }

/**
 * Counts attempts at what is costly or worth guessing. Counts before the attempt is judged, so that parallel guesses
 * count too. When Redis does not answer it lets the attempt pass and says so once a call.
 */
export class Throttle {
  constructor(private readonly redis: Redis, private readonly onFault: (error: unknown) => void) {}

  /** Counts an attempt by `who` (such as an account and an address) and tells whether it may go on. */
  async take(what: Throttled, ...who: string[]): Promise<ThrottleVerdict> {
    const { attempts, windowSeconds } = THROTTLES[what]
    try {
      const key = keyOf(what, who)
      const count = await this.redis.incr(key)
      if (count === 1) await this.redis.expire(key, windowSeconds)
      if (count <= attempts) return { allowed: true, retryAfterSeconds: 0 }
      const left = await this.redis.ttl(key)
      // A key without an expiry is left by a crash between the two commands above.
      if (left < 0) await this.redis.expire(key, windowSeconds)
      return { allowed: false, retryAfterSeconds: left > 0 ? left : windowSeconds }
    }
    catch (error) {
      this.onFault(error)
      return { allowed: true, retryAfterSeconds: 0 }
    }
  }

  /** Counts an attempt. @throws HttpProblem too-many-requests with the time to wait */
  async pass(what: Throttled, ...who: string[]): Promise<void> {
    const { allowed, retryAfterSeconds } = await this.take(what, ...who)
    if (!allowed) throw new HttpProblem('too-many-requests', {}, { 'Retry-After': String(retryAfterSeconds) })
  }

  /** Forgets the attempts of somebody who has proved to be right. */
  async clear(what: Throttled, ...who: string[]): Promise<void> {
    try {
      await this.redis.del(keyOf(what, who))
    }
    catch (error) {
      this.onFault(error)
    }
  }
}

const keyOf = (what: Throttled, who: readonly string[]) =>
  `farpole:${what}:${createHash('sha256').update(who.join('\n')).digest('base64url')}`
