import type { RedisOptions } from 'bullmq'
import type { Settings } from '#shared/schemas/settings'

const RETRY_AT_MOST_MS = 2000
const base = (redis: Settings['redis']): RedisOptions => ({
  host: redis.host,
  port: redis.port,
  ...(redis.password === '' ? {} : { password: redis.password }),
  connectTimeout: 5000,
  retryStrategy: (tries: number) => Math.min(100 * tries, RETRY_AT_MOST_MS),
})

/** For whoever adds messages: a command fails at once while Redis is away, and after 5 s when it is slow. */
export const producerConnection = (redis: Settings['redis']): RedisOptions =>
  ({ ...base(redis), enableOfflineQueue: false, maxRetriesPerRequest: 1, commandTimeout: 5000 })

/** For workers: waits for Redis as long as it takes. */
export const consumerConnection = (redis: Settings['redis']): RedisOptions => ({ ...base(redis), maxRetriesPerRequest: null })
