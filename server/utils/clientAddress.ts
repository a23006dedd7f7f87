import { getRequestHeader, getRequestIP } from 'h3'
import type { H3Event } from 'h3'
import { useServices } from './services'

/**
 * Address that a list in X-Forwarded-For gives for the visitor: the one that the outermost of our own proxies saw. What stands
 * before it the visitor may have written. Undefined where the list is shorter than the proxies.
 */
export function forwardedAddress(list: string | undefined, proxies: number): string | undefined {
  return list?.split(',').map(entry => entry.trim()).at(-proxies) || undefined
}

/** Address of whoever sends a request, as far as it can be believed. */
export function clientAddress(event: H3Event): string {
  const { proxies } = useServices().settings.web
  const forwarded = proxies > 0 ? forwardedAddress(getRequestHeader(event, 'x-forwarded-for'), proxies) : undefined
  return forwarded ?? getRequestIP(event) ?? ''
}
