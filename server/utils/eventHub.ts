import type { ServerResponse } from 'node:http'
import { Op } from 'sequelize'
import type { Role } from '#shared/schemas/api'
import type { Database } from '../models/database'
import type { EventRow } from '../models/records'
import { unacknowledged } from './connections'

const POLL_MS = 400
const CHECK_MS = 2000
const HEARTBEAT_MS = 15_000
const REAP_MS = 5000
/** How long a reader may leave bytes unacknowledged. With the two above a vanished one is gone within 45 s. */
const SILENCE_MS = 20_000
/** Transactions may commit in another order than their events got their ids: ids younger than this are read again. */
const OVERLAP_MS = 5000
const REPLAYED = 1000
/** Bytes that a reader may leave unread. */
const BACKLOG = 512 * 1024

interface StoredEvent { id: number, teamId: string, userId: string | null, type: string, data: string }

export interface Subscriber {
  sessionId: string
  userId: string
  teamId: string
  role: Role
  response: ServerResponse
  /** Id of the last event that the reader has, from its Last-Event-ID. */
  after: number | undefined
}

interface Stream extends Subscriber {
  /** Events that arrive while the missed ones are being read. */
  held: StoredEvent[] | null
  /** When bytes on their way to the reader were first seen, ms; null while all have arrived. */
  unheardSince: number | null
  close: () => void
}

/**
 * Feeds all event streams of a process from one poll of the event table, and ends those whose session has ended or
 * whose role has changed. Reads nothing while nobody listens.
 */
export class EventHub {
  private readonly streams = new Set<Stream>()
  private readonly seen = new Map<number, number>()
  private floor: number | undefined
  private closed = false
  private timers: NodeJS.Timeout[] = []
  private busy = { poll: false, check: false, reap: false }

  constructor(
    private readonly db: Database,
    private readonly liveSessions: (db: Database, ids: readonly string[]) => Promise<Map<string, Role>>,
    private readonly onFault: (error: unknown) => void,
  ) {}

  /** Number of open streams. */
  get size(): number {
    return this.streams.size
  }

  /** Serves one reader; settles when its stream has ended. */
  async serve(subscriber: Subscriber): Promise<void> {
    const { response } = subscriber
    if (this.closed) {
      response.end()
      return
    }
    const ended = new Promise<void>(resolve => response.once('close', resolve))
    const stream: Stream = { ...subscriber, held: [], unheardSince: null, close: () => response.end() }
    // What happens from here on is the reader's, also what is over before the first poll.
    const newest = await this.newestId()
    this.floor ??= newest
    this.streams.add(stream)
    response.write('retry: 2000\n\n')
    this.start()
    try {
      await this.catchUp(stream)
      await ended
    }
    finally {
      this.streams.delete(stream)
      response.end()
      if (this.streams.size === 0) this.stop()
    }
  }

  /** Ends every stream, as at shutdown. */
  close(): void {
    this.closed = true
    this.stop()
    for (const stream of this.streams) {
      // Spread over some seconds, so that the next server is not met by all at once.
      stream.response.write(`retry: ${Math.round(200 + 2800 * Math.random())}\n\n`)
      stream.close()
    }
  }

  private async catchUp(stream: Stream): Promise<void> {
    const missed = stream.after === undefined ? [] : await this.read({ [Op.gt]: stream.after }, stream)
    for (const event of missed) send(stream, event)
    const sent = new Set(missed.map(event => event.id))
    for (const event of stream.held ?? []) {
      if (!sent.has(event.id)) send(stream, event)
    }
    stream.held = null
  }

  private read(id: { [Op.gt]: number }, reader?: Subscriber): Promise<StoredEvent[]> {
    const addressed = reader ? { teamId: reader.teamId, userId: { [Op.or]: [null, reader.userId] } } : {}
    return this.db.models.EventRow.findAll({
      where: { id, ...addressed }, attributes: ['id', 'teamId', 'userId', 'type', 'data'], order: [['id', 'ASC']], limit: REPLAYED, raw: true,
    })
  }

  private async newestId(): Promise<number> {
    return await this.db.models.EventRow.max<number, EventRow>('id') ?? 0
  }

  private start(): void {
    if (this.timers.length > 0) return
    this.timers = [
      setInterval(() => this.guarded('poll', () => this.poll()), POLL_MS),
      setInterval(() => this.guarded('check', () => this.check()), CHECK_MS),
      setInterval(() => this.guarded('reap', () => this.reap()), REAP_MS),
      setInterval(() => this.beat(), HEARTBEAT_MS),
    ]
  }

  private stop(): void {
    for (const timer of this.timers) clearInterval(timer)
    this.timers = []
    this.floor = undefined
    this.seen.clear()
  }

  private guarded(name: keyof EventHub['busy'], work: () => Promise<void>): void {
    if (this.busy[name]) return
    this.busy[name] = true
    work().catch(this.onFault).finally(() => {
      this.busy[name] = false
    })
  }

  private async poll(): Promise<void> {
    this.floor ??= await this.newestId()
    const now = Date.now()
    for (const event of await this.read({ [Op.gt]: this.floor })) {
      if (this.seen.has(event.id)) continue
      this.seen.set(event.id, now)
      for (const stream of this.streams) {
        if (stream.teamId !== event.teamId || (event.userId !== null && event.userId !== stream.userId)) continue
        if (stream.held) stream.held.push(event)
        else send(stream, event)
      }
    }
    for (const [id, at] of this.seen) {
      if (now - at < OVERLAP_MS) continue
      this.seen.delete(id)
      this.floor = Math.max(this.floor, id)
    }
  }

  private async check(): Promise<void> {
    const live = await this.liveSessions(this.db, [...this.streams].map(stream => stream.sessionId))
    for (const stream of this.streams) {
      if (live.get(stream.sessionId) !== stream.role) stream.close()
    }
  }

  /** Cuts the streams of readers that are gone without a word, as after a lost network. */
  private async reap(): Promise<void> {
    const unheard = await unacknowledged([...this.streams].flatMap(({ response }) => response.socket ?? []))
    const now = performance.now()
    for (const stream of this.streams) {
      const { socket } = stream.response
      stream.unheardSince = socket && unheard.has(socket) ? stream.unheardSince ?? now : null
      if (stream.unheardSince !== null && now - stream.unheardSince > SILENCE_MS) socket?.destroy()
    }
  }

  private beat(): void {
    for (const stream of this.streams) stream.response.write(': still here\n\n')
  }
}

function send({ response, close }: Stream, event: StoredEvent): void {
  response.write(`id: ${event.id}\nevent: ${event.type}\ndata: ${event.data}\n\n`)
  if (response.writableLength > BACKLOG) close()
}
