import type { ProblemError } from './problem'

/** What the token of a mailed link is made of; anything else is no token. */
const TOKEN = /^[\w-]{16,256}$/

/** The token that a mailed link carries behind its # sign, which no server, log or referrer sees; null when there is none. */
export function linkToken(hash: string): string | null {
  const token = new URLSearchParams(hash.replace(/^#/, '')).get('token')
  return token !== null && TOKEN.test(token) ? token : null
}

/** Whether a refusal says that the link leads nowhere (any more), rather than something of what was typed beside it. */
export const isDeadLink = (error: ProblemError): boolean => error.status === 410 || error.at('/token') !== undefined
