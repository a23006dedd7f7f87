import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { environmentVariablesSchema, readSettings } from '#shared/schemas/settings'

const SECRETS = { FARPOLE_SESSION_SECRET: '9f2c7be14d0a86e35b1f7c92aa03d4e8', FARPOLE_DB_PASSWORD: 'kX3v9Qz71LmT', FARPOLE_REDIS_PASSWORD: 'p0Wd82hYcRb5' }
const PRODUCTION = { ...SECRETS, FARPOLE_ENV: 'production', FARPOLE_BASE_URL: 'https://bits.example.org' }

const faultsOf = (env: Record<string, string>) => {
  try {
    readSettings(env)
  }
  catch (error) {
    return error instanceof Error ? error.message : ''
  }
  return ''
}

describe('settings', () => {
  it('read production with numbers as numbers and the rest by default', () => {
    const settings = readSettings({ ...PRODUCTION, FARPOLE_WORKER_SLOTS: '12', PATH: '/bin' })
    expect(settings).toMatchObject({ env: 'production', baseUrl: 'https://bits.example.org', workerSlots: 12, mail: null, logLevel: 'info' })
    expect(settings.database).toEqual({ host: '127.0.0.1', port: 4871, name: 'farpole', user: 'farpole', password: SECRETS.FARPOLE_DB_PASSWORD, poolMax: 8 })
  })

  it('take an unset environment for production, so that nothing opens a demo by mistake', () => {
    expect(readSettings({ ...SECRETS }).env).toBe('production')
    expect(readSettings({ ...SECRETS, FARPOLE_ENV: '' }).env).toBe('production')
  })

  it('list every fault at once, by name, without repeating values', () => {
    const message = faultsOf({ FARPOLE_ENV: 'staging', FARPOLE_WEB_PORT: '99999', FARPOLE_DB_PORT: 'four', FARPOLE_DB_PASSWORD: 'short-one', FARPOLE_WROKER_SLOTS: '2' })
    for (const name of ['FARPOLE_ENV', 'FARPOLE_WEB_PORT', 'FARPOLE_DB_PORT', 'FARPOLE_DB_PASSWORD is too short', 'FARPOLE_REDIS_PASSWORD is missing', 'FARPOLE_SESSION_SECRET is missing', 'FARPOLE_WROKER_SLOTS is not a setting']) {
      expect(message).toContain(name)
    }
    expect(message).not.toContain('short-one')
  })

  it.each(['FARPOLE_SESSION_SECRET', 'FARPOLE_DB_PASSWORD', 'FARPOLE_REDIS_PASSWORD'])('refuse a missing, short or placeholder %s in production', (name) => {
    expect(faultsOf({ ...PRODUCTION, [name]: '' })).toContain(`${name} is missing`)
    expect(faultsOf({ ...PRODUCTION, [name]: 'a1b2' })).toContain(`${name} is too short`)
    expect(faultsOf({ ...PRODUCTION, [name]: 'change-me-change-me-change-me-change-me' })).toContain(`${name} looks like a placeholder`)
    expect(faultsOf({ ...PRODUCTION, [name]: 'x'.repeat(64) })).toContain(`${name} looks like a placeholder`)
  })

  it('want https in production, but for this machine alone', () => {
    expect(faultsOf({ ...PRODUCTION, FARPOLE_BASE_URL: 'http://bits.example.org' })).toContain('FARPOLE_BASE_URL must start with https://')
    expect(faultsOf({ ...PRODUCTION, FARPOLE_BASE_URL: 'https://bits.example.org/farpole' })).toContain('FARPOLE_BASE_URL must have no path')
    expect(faultsOf({ ...PRODUCTION, FARPOLE_BASE_URL: 'http://127.0.0.1:4870' })).toBe('')
  })

  it('want an address for mails to come from, and no catcher of mail in production', () => {
    const url = { FARPOLE_MAIL_URL: 'smtps://mail.example.org' }
    expect(faultsOf({ ...PRODUCTION, ...url })).toContain('FARPOLE_MAIL_FROM is missing')
    expect(faultsOf({ ...PRODUCTION, ...url, FARPOLE_MAIL_FROM: 'a@b.example.org\r\nBcc: c@d.example.org' })).toContain('FARPOLE_MAIL_FROM must be an e-mail address')
    expect(readSettings({ ...PRODUCTION, ...url, FARPOLE_MAIL_FROM: 'bits@example.org' }).mail).toEqual({ url: 'smtps://mail.example.org', from: 'bits@example.org' })
    expect(faultsOf({ ...PRODUCTION, FARPOLE_DEMO_MAIL_DIR: 'mail' })).toContain('FARPOLE_DEMO_MAIL_DIR belongs to the demo')
  })

  it('are all in .env.example, which names no other', () => {
    const example = readFileSync(new URL('../../.env.example', import.meta.url), 'utf8')
    const named = [...example.matchAll(/^#? ?(FARPOLE_\w+)=/gm)].map(match => match[1])
    expect(named.sort()).toEqual(Object.keys(environmentVariablesSchema.shape).sort())
  })
})
