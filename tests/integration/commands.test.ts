import { spawn } from 'node:child_process'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { meSchema } from '#shared/schemas/api'
import { ROOT } from '../../server/launch/layout.mjs'
import { Client, theStack } from './harness'

/** Runs a program of the build to its end. */
function command(program: string, args: string[], { input = '', env = {} }: { input?: string, env?: Record<string, string> } = {}): Promise<{ code: number | null, output: string }> {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, [join(ROOT, 'server/launch/run.mjs'), program, ...args], { env: { ...theStack().env, ...env } })
    let output = ''
    for (const stream of [child.stdout, child.stderr]) stream.setEncoding('utf8').on('data', (text: string) => { output += text })
    child.once('error', reject)
    child.once('close', code => resolve({ code, output }))
    child.stdin.end(input)
  })
}

const signInReply = (email: string, password: string) => new Client(theStack().baseUrl).post('/api/session', { email, password })

describe('npm run person', () => {
  const email = 'rosa.lind@example.org'
  const full = ['--email', email, '--name', 'Rosa Lind', '--role', 'researcher', '--team', 'Ferry lab', '--quota-hours', '2.5']

  it('adds someone who can sign in, changes the password and ends what was open, and disables', async () => {
    expect(await command('person', full, { input: 'a quiet harbour\n' })).toMatchObject({ code: 0, output: expect.stringContaining('Added') })
    const client = new Client(theStack().baseUrl)
    const reply = await client.post('/api/session', { email, password: 'a quiet harbour' })
    expect(reply.status).toBe(200)
    expect(meSchema.parse(await reply.json())).toMatchObject({ user: { role: 'researcher', name: 'Rosa Lind' }, team: { name: 'Ferry lab' }, quota: { limit: 9000 } })

    expect(await command('person', full, { input: 'another harbour\n' })).toMatchObject({ code: 0, output: expect.stringContaining('Changed') })
    expect((await client.get('/api/me')).status).toBe(401)
    expect((await signInReply(email, 'a quiet harbour')).status).toBe(401)
    expect((await signInReply(email, 'another harbour')).status).toBe(200)

    expect((await command('person', ['--email', email, '--disable'])).code).toBe(0)
    expect((await signInReply(email, 'another harbour')).status).toBe(401)
  })

  it('says what is missing or wrong and adds nobody', async () => {
    const { code, output } = await command('person', ['--email', 'nobody@example.org', '--role', 'owner'], { input: 'a quiet harbour\n' })
    expect(code).toBe(1)
    for (const option of ['--name', '--role', '--team']) expect(output).toContain(option)
    expect((await command('person', full.with(1, 'other@example.org'), { input: 'short\n' })).output).toContain('At least 12')
    expect((await signInReply('other@example.org', 'short')).status).toBe(401)
  })
})

describe('the programs of the build', () => {
  it.each(['web', 'worker', 'migrate', 'person'])('refuse to start with unsafe settings, naming them without a stack trace: %s', async (program) => {
    const { code, output } = await command(program, program === 'person' ? ['--email', 'a@example.org', '--disable'] : [], { env: { FARPOLE_ENV: 'production', FARPOLE_SESSION_SECRET: 'secret', FARPOLE_WEB_PORT: '0' } })
    expect(code).toBe(1)
    expect(output).toContain('FARPOLE_SESSION_SECRET is too short')
    expect(output).toContain('FARPOLE_WEB_PORT must be at least 1')
    expect(output).not.toMatch(/\n\s+at /)
  })

  it('never add the demo team in production', async () => {
    const { code, output } = await command('migrate', ['--seed-demo'], { env: { FARPOLE_ENV: 'production', FARPOLE_DEMO_MAIL_DIR: '' } })
    expect(code).toBe(1)
    expect(output).toContain('demo')
  })
})
