import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { SharedStream, type StreamNews } from '~/utils/sharedStream'

type Grant = (lock: Lock | null) => unknown
interface Waiting { grant: Grant, settle: (value: unknown) => void, refuse: (error: unknown) => void }

/** Stands for the browser's locks: one lock, waiters in turn, stealing and giving up as the standard has them. */
class Locks {
  holder: Waiting | null = null
  queue: Waiting[] = []

  request = ((_name: string, options: LockOptions, grant: Grant) => new Promise<unknown>((settle, refuse) => {
    const waiting = { grant, settle, refuse }
    if (options.steal) {
      this.holder?.refuse(new DOMException('stolen', 'AbortError'))
      this.give(waiting)
    }
    else if (this.holder === null) {
      this.give(waiting)
    }
    else if (options.ifAvailable) {
      settle(grant(null))
    }
    else {
      this.queue.push(waiting)
      options.signal?.addEventListener('abort', () => {
        if (!this.queue.includes(waiting)) return
        this.queue = this.queue.filter(one => one !== waiting)
        refuse(new DOMException('given up', 'AbortError'))
      })
    }
  })) as LockManager['request']

  private give(waiting: Waiting) {
    this.holder = waiting
    Promise.resolve(waiting.grant({ name: 'lock', mode: 'exclusive' })).then((value) => {
      if (this.holder !== waiting) return
      this.holder = null
      waiting.settle(value)
      const next = this.queue.shift()
      if (next) this.give(next)
    })
  }
}

/** Stands for the browser's channel: every other open end hears what one says. */
class Channel {
  static ends = new Set<Channel>()
  onmessage: ((event: MessageEvent) => void) | null = null
  deaf = false
  constructor() {
    Channel.ends.add(this)
  }

  postMessage(data: unknown) {
    for (const end of Channel.ends) {
      if (end !== this && !end.deaf) end.onmessage?.(new MessageEvent('message', { data }))
    }
  }

  close() {
    Channel.ends.delete(this)
  }
}

const settle = () => vi.advanceTimersByTimeAsync(0)
const deleted: StreamNews = { kind: 'event', event: { type: 'deleted', jobId: '01ARZ3NDEKTSV4RRFFQ69G5FAV' } }

let locks: Locks
let opened: { tab: Tab, late: boolean, open: boolean }[]

class Tab {
  heard: StreamNews[] = []
  visible = true
  channel: Channel | null = null
  say: (news: StreamNews) => void = () => {}
  readonly stream: SharedStream

  constructor(withLocks = true) {
    this.stream = new SharedStream({
      name: 'test',
      locks: withLocks ? locks : undefined,
      channel: () => this.channel = new Channel(),
      open: (tell, late) => {
        const entry = { tab: this, late, open: true }
        opened.push(entry)
        this.say = tell
        return () => {
          entry.open = false
        }
      },
      take: news => this.heard.push(news),
      isVisible: () => this.visible,
    })
  }
}

const leading = () => opened.filter(entry => entry.open).map(entry => entry.tab)

describe('one event stream for all tabs', () => {
  beforeEach(() => {
    vi.useFakeTimers()
    locks = new Locks()
    opened = []
    Channel.ends.clear()
  })
  afterEach(() => vi.useRealTimers())

  async function tabs(count: number): Promise<Tab[]> {
    const all = Array.from({ length: count }, () => new Tab())
    for (const tab of all) {
      tab.stream.start()
      await settle()
    }
    return all
  }

  it('is opened by one and heard by all', async () => {
    const all = await tabs(3)
    expect(leading()).toEqual([all[0]])
    expect(opened[0]!.late).toBe(false)
    all[0]!.say(deleted)
    for (const tab of all) expect(tab.heard).toEqual([deleted])
  })

  it('passes to another when its tab goes, which knows that something may have been missed', async () => {
    const all = await tabs(3)
    all[0]!.stream.stop()
    await settle()
    expect(leading()).toEqual([all[1]])
    expect(opened.at(-1)).toMatchObject({ late: true })
    all[1]!.say(deleted)
    expect(all[0]!.heard).toEqual([])
    expect(all[2]!.heard).toEqual([deleted])
    all[1]!.stream.stop()
    await settle()
    expect(leading()).toEqual([all[2]])
    all[2]!.stream.stop()
    await settle()
    expect(leading()).toEqual([])
    expect(Channel.ends.size).toBe(0)
  })

  it('is taken from a tab that does not answer, by one that is looked at', async () => {
    const [frozen, hidden, seen] = await tabs(3) as [Tab, Tab, Tab]
    hidden.visible = false
    await vi.advanceTimersByTimeAsync(60_000)
    expect(leading()).toEqual([frozen])
    frozen.channel!.deaf = true
    await vi.advanceTimersByTimeAsync(14_500)
    expect(leading()).toEqual([seen])
    seen.say(deleted)
    expect(hidden.heard).toEqual([deleted])
    // Awake again, the former leader is one of the others, and leads again when its turn comes.
    frozen.channel!.deaf = false
    seen.stream.stop()
    hidden.stream.stop()
    await settle()
    expect(leading()).toEqual([frozen])
  })

  it('comes back to a tab that slept and woke', async () => {
    const [first, second] = await tabs(2) as [Tab, Tab]
    first.stream.stop()
    await settle()
    first.stream.start(true)
    await settle()
    expect(leading()).toEqual([second])
    second.stream.stop()
    await settle()
    expect(leading()).toEqual([first])
    first.stream.start()
    expect(leading()).toEqual([first])
  })

  it('tells the other tabs of a sign-out', async () => {
    const all = await tabs(3)
    all[1]!.stream.tellOthers({ kind: 'refused' })
    for (const tab of [all[0]!, all[2]!]) expect(tab.heard).toEqual([{ kind: 'refused' }])
    expect(all[1]!.heard).toEqual([])
  })

  it('is kept by each tab for itself where the browser has no locks', async () => {
    const all = [new Tab(false), new Tab(false)]
    for (const tab of all) tab.stream.start()
    expect(leading()).toEqual(all)
    all[0]!.say(deleted)
    expect(all[1]!.heard).toEqual([])
    await vi.advanceTimersByTimeAsync(30_000)
    expect(leading()).toEqual(all)
    for (const tab of all) tab.stream.stop()
    expect(leading()).toEqual([])
  })
})
