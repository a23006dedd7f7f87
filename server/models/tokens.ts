import { createHash, randomBytes } from 'node:crypto'

/** SHA-256, hex, of a token: what the database keeps of it. */
export const hashToken = (token: string): string => createHash('sha256').update(token).digest('hex')

/** A new token of 256 random bits in 43 characters that a link can carry, with its hash. */
export function newToken(): { token: string, tokenHash: string } {
  const token = randomBytes(32).toString('base64url')
  return { token, tokenHash: hashToken(token) }
}
