import { Redis } from 'ioredis'
import { defineNitroPlugin } from 'nitropack/runtime'
import type { Logger } from 'pino'
import { readSettings } from '#shared/schemas/settings'
import { closeDatabase, openDatabase } from '../models/database'
import { DEMO_TEAM } from '../models/seed'
import { configureSessionCookie, liveSessions } from '../utils/auth'
import { EventHub } from '../utils/eventHub'
import { errorFields, openLog } from '../utils/log'
import { prepareUnmatched } from '../utils/passwords'
import { provideServices } from '../utils/services'
import { Throttle } from '../utils/throttle'

/** Opens settings, log, database and Redis for the web process, and closes them when it ends. */
export default defineNitroPlugin((nitroApp) => {
  const settings = readSettings(process.env)
  const log = openLog(settings.logLevel)
  if (!settings.mail) log.warn('FARPOLE_MAIL_URL is not set: nobody can be invited or get a new password by mail; npm run person does both')
  configureSessionCookie(settings, process.env)
  // The sign-in page offers the demo's accounts; no other installation has any to offer.
  const offered = settings.env === 'production' ? [] : DEMO_TEAM.people.map(({ email, role }) => ({ email, role, password: DEMO_TEAM.password }))
  process.env.NUXT_PUBLIC_DEMO_ACCOUNTS = JSON.stringify(offered)
  const db = openDatabase(settings.database)
  const redis = new Redis({
    ...settings.redis, enableOfflineQueue: false, maxRetriesPerRequest: 1, connectTimeout: 2000, commandTimeout: 500,
  })
  logOutages(redis, log)
  const throttle = new Throttle(redis, error => log.warn(errorFields(error), 'attempts are not counted'))
  const hub = new EventHub(db, liveSessions, error => log.warn(errorFields(error), 'the event stream could not be read'))
  provideServices({ settings, db, redis, throttle, hub })
  prepareUnmatched().catch(error => log.error(errorFields(error), 'hashing failed'))
  // Streams never end by themselves: the server would wait for them until it is killed.
  process.once('SIGTERM', () => hub.close())
  process.once('SIGINT', () => hub.close())
  nitroApp.hooks.hook('close', async () => {
    hub.close()
    redis.disconnect()
    await closeDatabase(db)
  })
})

/** One line when Redis goes and one when it is back, however often the connection is tried. */
function logOutages(redis: Redis, log: Logger): void {
  let away = false
  redis.on('error', (error) => {
    if (!away) log.warn({ code: 'code' in error ? error.code : error.name }, 'Redis does not answer')
    away = true
  })
  redis.on('ready', () => {
    if (away) log.info('Redis answers again')
    away = false
  })
}
