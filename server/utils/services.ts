import type { Redis } from 'ioredis'
import type { Settings } from '#shared/schemas/settings'
import type { Database } from '../models/database'
import type { EventHub } from './eventHub'
import type { Throttle } from './throttle'

/** What one web process opens at start and closes at its end. */
export interface Services {
  settings: Settings
  db: Database
  redis: Redis
  throttle: Throttle
  hub: EventHub
}

let services: Services | undefined

/** Called once by the plugin that opens the services. */
export function provideServices(opened: Services): void {
  services = opened
}

/** The process's services. Throws before the plugin has run. */
export function useServices(): Services {
  if (!services) throw new Error('The services are not open yet.')
  return services
}
