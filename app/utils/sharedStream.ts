import type { StreamEvent } from '#shared/schemas/api'

/** How often a visible tab asks whether the leading one lives, and how long it waits for the answer, ms. */
const ASK_MS = 10_000
const ANSWER_MS = 4_000

/** What a tab is told: something happened; events may have been missed; the server will not have the stream. */
export type StreamNews = { kind: 'event', event: StreamEvent } | { kind: 'back' } | { kind: 'refused' }
type Message = StreamNews | { kind: 'ask' } | { kind: 'lives' }

export interface SharedStreamNeeds {
  /** names the browser's lock and channel: one for each signed-in user */
  name: string
  /** undefined where the browser has none, as over plain HTTP: each tab then keeps a stream of its own */
  locks: Pick<LockManager, 'request'> | undefined
  channel: (name: string) => Pick<BroadcastChannel, 'postMessage' | 'close' | 'onmessage'>
  /** opens the stream itself; `late`: something may have happened while there was none. Answers how to close it. */
  open: (tell: (news: StreamNews) => void, late: boolean) => () => void
  take: (news: StreamNews) => void
  isVisible: () => boolean
}

/**
 * One event stream for all tabs of a browser. The tab that holds the lock keeps the stream and passes on what it hears; when it
 * goes, the lock passes to another by itself. A leading tab that does not answer any more (frozen, stopped in a debugger) has
 * its lock taken by a tab that somebody looks at.
 */
export class SharedStream {
  private channel: ReturnType<SharedStreamNeeds['channel']> | null = null
  private ended: AbortController | null = null
  private closeStream: (() => void) | null = null
  private asking: ReturnType<typeof setInterval> | undefined
  private answer: ReturnType<typeof setTimeout> | undefined

  constructor(private readonly needs: SharedStreamNeeds) {}

  /** Whether this tab holds the stream. */
  get leads(): boolean {
    return this.closeStream !== null
  }

  /** Joins the tabs. `late`: this tab was away, so that what it shows may be old. */
  start(late = false): void {
    if (this.ended) return
    this.ended = new AbortController()
    this.channel = this.needs.channel(this.needs.name)
    this.channel.onmessage = ({ data }: MessageEvent<Message>) => this.hear(data)
    if (!this.needs.locks) return this.lead(late)
    this.asking = setInterval(() => this.ask(), ASK_MS)
    void this.seek(this.needs.locks, this.ended.signal, late)
  }

  /** Leaves the others to themselves: they find a new leader. */
  stop(): void {
    clearInterval(this.asking)
    clearTimeout(this.answer)
    this.answer = undefined
    this.resign()
    this.ended?.abort()
    this.ended = null
    this.channel?.close()
    this.channel = null
  }

  /** Tells the other tabs. */
  tellOthers(news: StreamNews): void {
    this.channel?.postMessage(news satisfies Message)
  }

  /** Asks whether the leader lives, unless it is this tab, or nobody looks at this one. */
  ask(): void {
    if (this.leads || !this.needs.isVisible() || !this.channel || !this.needs.locks) return
    this.answer ??= setTimeout(() => this.takeOver(), ANSWER_MS)
    this.channel.postMessage({ kind: 'ask' } satisfies Message)
  }

  private hear(message: Message): void {
    if (message.kind === 'ask') {
      if (this.leads) this.channel?.postMessage({ kind: 'lives' } satisfies Message)
      return
    }
    // Whatever is heard of the leader says that it lives.
    clearTimeout(this.answer)
    this.answer = undefined
    if (message.kind !== 'lives') this.needs.take(message)
  }

  /** Waits for the lock for as long as this tab takes part, and again after it was taken away. */
  private async seek(locks: Pick<LockManager, 'request'>, signal: AbortSignal, late: boolean): Promise<void> {
    let waited = late
    await this.hold(locks, { ifAvailable: true }, signal, waited)
    while (!signal.aborted) {
      waited = true
      await this.hold(locks, { signal }, signal, waited)
    }
  }

  private takeOver(): void {
    this.answer = undefined
    const signal = this.ended?.signal
    if (signal && this.needs.locks && !this.leads) void this.hold(this.needs.locks, { steal: true }, signal, true)
  }

  /** Leads while the lock is held; settles when it is not, for whatever reason. */
  private async hold(locks: Pick<LockManager, 'request'>, options: LockOptions, signal: AbortSignal, late: boolean): Promise<void> {
    try {
      await locks.request(this.needs.name, options, async (lock) => {
        if (lock === null || signal.aborted || this.leads) return
        this.lead(late)
        await new Promise<void>(resolve => signal.addEventListener('abort', () => resolve(), { once: true }))
      })
    }
    catch (error) {
      if (!(error instanceof DOMException && error.name === 'AbortError')) throw error
      // The wait has ended with this tab's part, or another tab has taken the lock.
      this.resign()
    }
  }

  private lead(late: boolean): void {
    this.closeStream = this.needs.open((news) => {
      this.needs.take(news)
      if (this.needs.locks) this.tellOthers(news)
    }, late)
  }

  private resign(): void {
    this.closeStream?.()
    this.closeStream = null
  }
}
