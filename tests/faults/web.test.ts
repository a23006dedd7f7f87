import net from 'node:net'
import { randomUUID } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { jobDetailSchema } from '#shared/schemas/api'
import { signIn, switchingSpec } from '../integration/harness'
import { figure, useStage } from './stage'

/**
 * Stands between a web server and its database. Armed, it lets the commit of the next job through, holds back the
 * database's word that it was made, and calls `onCommitted`.
 */
class CommitWatcher {
  private armed = false
  private readonly server: net.Server
  private readonly sockets = new Set<net.Socket>()

  constructor(databasePort: number, private readonly onCommitted: () => void) {
    this.server = net.createServer(client => this.join(client, net.connect(databasePort, '127.0.0.1')))
  }

  async listen(): Promise<number> {
    await new Promise<void>(resolve => this.server.listen(0, '127.0.0.1', resolve))
    const address = this.server.address()
    if (address === null || typeof address === 'string') throw new Error('The watcher has no port.')
    return address.port
  }

  arm(): void {
    this.armed = true
  }

  close(): void {
    for (const socket of this.sockets) socket.destroy()
    this.server.close()
  }

  private join(client: net.Socket, database: net.Socket): void {
    let insertsJob = false
    let holding = false
    for (const socket of [client, database]) {
      this.sockets.add(socket)
      socket.on('error', () => undefined)
      socket.on('close', () => {
        client.destroy()
        database.destroy()
      })
    }
    client.on('data', (bytes) => {
      if (this.armed && bytes.includes('INSERT INTO `jobs`')) insertsJob = true
      if (insertsJob && bytes.includes('COMMIT')) holding = true
      database.write(bytes)
    })
    database.on('data', (bytes) => {
      if (!holding) return client.write(bytes)
      this.armed = false
      this.onCommitted()
    })
  }
}

describe('Faults of the web server', () => {
  const stage = useStage('faults-web', 1)

  it('answers with the same job when it was killed between commit and reply', async () => {
    const { stack, db } = stage()
    await stack.webs[0]?.stop()
    let resolveCommitted = () => {}
    const committed = new Promise<void>((resolve) => { resolveCommitted = resolve })
    const watcher = new CommitWatcher(stack.stack.ports.database, resolveCommitted)
    const web = await stack.startWeb({ FARPOLE_DB_PORT: String(await watcher.listen()) })
    const client = await signIn('researcher', stack.info.baseUrl)
    const key = randomUUID()
    const spec = switchingSpec({ trials: 100, seed: 31 })
    watcher.arm()
    const firstReply = client.post('/api/jobs', spec, { 'Idempotency-Key': key }).then(reply => `status ${reply.status}`, () => 'no reply')
    await committed
    await web.kill()
    expect(await firstReply).toBe('no reply')
    watcher.close()
    const accepted = await db.models.IdempotencyKey.findAll({ where: { key } })
    expect(accepted, 'the job was accepted before the server ended').toHaveLength(1)

    await stack.startWeb()
    const replies = await Promise.all([1, 2].map(() => client.post('/api/jobs', spec, { 'Idempotency-Key': key })))
    const jobs = await Promise.all(replies.map(async reply => jobDetailSchema.parse(await reply.json())))
    expect(jobs.map(job => job.id)).toEqual([accepted[0]?.jobId, accepted[0]?.jobId])
    expect(await db.models.Job.count({ where: { specHash: jobs[0]?.specHash ?? '' } })).toBe(1)

    await stage().startWorker()
    const job = await stage().settled(jobs[0]?.id ?? '')
    expect(job.state).toBe('done')
    const { reserve, release, charge } = await stage().ledger(job.id)
    expect([reserve?.entries, release?.entries, charge?.entries]).toEqual([1, 1, 1])
    figure('web server killed between commit and reply', `${jobs.length} more tries with the same key, 0 duplicates, 1 charge`)
  })
})
