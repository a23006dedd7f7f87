import { streamEventSchema, type StreamEvent } from '#shared/schemas/api'

const TYPES = ['job', 'deleted', 'quota', 'outlook'] as const
const FIRST_RETRY_MS = 1_000
const LAST_RETRY_MS = 30_000

/** The event of a message, or null where the data is not of that type's shape. */
export function parseStreamEvent(type: string, data: string): StreamEvent | null {
  try {
    const parsed = streamEventSchema.safeParse({ type, ...JSON.parse(data) })
    return parsed.success ? parsed.data : null
  }
  catch {
    return null
  }
}

export interface StreamListener {
  event: (event: StreamEvent) => void
  /** The stream is open again after it was away: events may have been missed. */
  back: () => void
  /** The server will not have this stream: it restarts, or the session has ended. */
  refused: () => void
}

/**
 * Keeps one event stream open until the returned function is called. The browser reconnects by itself with Last-Event-ID after a
 * cut line; a refusal (the server restarting) ends an EventSource for good, so that a new one is made, later and later.
 * `late`: something may have been missed before it opens for the first time.
 */
export function keepStream(url: string, listener: StreamListener, late = false): () => void {
  let source: EventSource | null = null
  let timer: ReturnType<typeof setTimeout> | undefined
  let retryMs = FIRST_RETRY_MS
  let wasAway = late

  const connect = () => {
    source = new EventSource(url)
    source.onopen = () => {
      retryMs = FIRST_RETRY_MS
      if (wasAway) listener.back()
      wasAway = false
    }
    source.onerror = () => {
      wasAway = true
      if (source?.readyState !== EventSource.CLOSED) return
      listener.refused()
      timer = setTimeout(connect, retryMs)
      retryMs = Math.min(LAST_RETRY_MS, retryMs * 2)
    }
    for (const type of TYPES) {
      source.addEventListener(type, (message: MessageEvent<string>) => {
        const event = parseStreamEvent(type, message.data)
        if (event) listener.event(event)
      })
    }
  }

  connect()
  return () => {
    clearTimeout(timer)
    source?.close()
  }
}
