import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { keepStream, parseStreamEvent } from '~/utils/eventSource'

/** Stands for the browser's EventSource: the test decides what the line does. */
class Line extends EventTarget {
  static readonly CLOSED = 2
  static lines: Line[] = []
  readyState = 0
  onopen: (() => void) | null = null
  onerror: (() => void) | null = null
  constructor(readonly url: string) {
    super()
    Line.lines.push(this)
  }

  open() {
    this.readyState = 1
    this.onopen?.()
  }

  fail(readyState: number) {
    this.readyState = readyState
    this.onerror?.()
  }

  tell(type: string, data: unknown) {
    this.dispatchEvent(new MessageEvent(type, { data: typeof data === 'string' ? data : JSON.stringify(data) }))
  }

  close() {
    this.readyState = Line.CLOSED
  }
}

describe('event stream', () => {
  beforeEach(() => {
    Line.lines = []
    vi.useFakeTimers()
    vi.stubGlobal('EventSource', Line)
  })
  afterEach(() => {
    vi.useRealTimers()
    vi.unstubAllGlobals()
  })

  const quota = { limit: 10, charged: 1, reserved: 0, left: 9, windowDays: 30 }

  it('passes on events of a known shape alone', () => {
    const event = vi.fn()
    keepStream('/api/events', { event, back: vi.fn(), refused: vi.fn() })
    Line.lines[0]!.tell('quota', { quota })
    Line.lines[0]!.tell('quota', { quota: { ...quota, limit: 'much' } })
    Line.lines[0]!.tell('quota', 'not JSON')
    expect(event.mock.calls).toEqual([[{ type: 'quota', quota }]])
  })

  it('asks for what was missed after the line was away, not at first', () => {
    const back = vi.fn()
    keepStream('/api/events', { event: vi.fn(), back, refused: vi.fn() })
    Line.lines[0]!.open()
    expect(back).not.toHaveBeenCalled()
    Line.lines[0]!.fail(0)
    Line.lines[0]!.open()
    expect(back).toHaveBeenCalledOnce()
    expect(Line.lines).toHaveLength(1)
  })

  it('makes a new line after a refusal, later each time, and none after the end', () => {
    const refused = vi.fn()
    const stop = keepStream('/api/events', { event: vi.fn(), back: vi.fn(), refused })
    Line.lines[0]!.fail(0)
    expect(refused).not.toHaveBeenCalled()
    Line.lines[0]!.fail(Line.CLOSED)
    expect(refused).toHaveBeenCalledOnce()
    vi.advanceTimersByTime(1_000)
    expect(Line.lines).toHaveLength(2)
    Line.lines[1]!.fail(Line.CLOSED)
    vi.advanceTimersByTime(1_000)
    expect(Line.lines).toHaveLength(2)
    vi.advanceTimersByTime(1_000)
    expect(Line.lines).toHaveLength(3)
    Line.lines[2]!.fail(Line.CLOSED)
    stop()
    vi.advanceTimersByTime(60_000)
    expect(Line.lines).toHaveLength(3)
  })

  it('reads each type by its schema', () => {
    expect(parseStreamEvent('deleted', '{"jobId":"01ARZ3NDEKTSV4RRFFQ69G5FAV"}')).toEqual({ type: 'deleted', jobId: '01ARZ3NDEKTSV4RRFFQ69G5FAV' })
    expect(parseStreamEvent('deleted', '{"jobId":"x"}')).toBeNull()
  })
})
