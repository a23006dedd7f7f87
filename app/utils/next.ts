/** Where to go after signing in: a path of this site, never another address. */
export function safeNext(next: unknown): string {
  return typeof next === 'string' && /^\/(?![/\\])/.test(next) && !next.startsWith('/signin') ? next : '/'
}
