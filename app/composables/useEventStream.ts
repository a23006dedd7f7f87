import type { StreamEvent } from '#shared/schemas/api'

type Shared = { kind: 'event', event: StreamEvent } | { kind: 'back' } | { kind: 'refused' }
const NAME = 'farpole-events'

/**
 * Feeds the stores from the server's event stream while the calling component lives. Of all tabs of a browser one holds the
 * stream, by a lock that passes to another tab when it closes, and tells the others.
 */
export function useEventStream() {
  const session = useSessionStore()
  const jobs = useJobsStore()
  const router = useRouter()

  const leaveWhenEnded = async () => {
    const isUp = await session.load().then(() => true, () => false)
    const { path, fullPath } = router.currentRoute.value
    if (isUp && !session.me && path !== '/signin') await navigateTo({ path: '/signin', query: { next: fullPath } })
  }
  const take = (message: Shared) => {
    if (message.kind === 'refused') return void leaveWhenEnded()
    if (message.kind === 'back') return void Promise.all([session.load(), jobs.refresh()])
    if (message.event.type === 'quota') session.setQuota(message.event.quota)
    else jobs.receive(message.event)
  }

  onMounted(() => {
    if (!session.me) return
    const ended = new AbortController()
    const channel = new BroadcastChannel(`${NAME}-${session.me.user.id}`)
    channel.onmessage = (message: MessageEvent<Shared>) => take(message.data)
    const tell = (message: Shared) => {
      take(message)
      channel.postMessage(message)
    }
    const hold = () => new Promise<void>((resolve) => {
      const stop = keepStream('/api/events', { event: event => tell({ kind: 'event', event }), back: () => tell({ kind: 'back' }), refused: () => tell({ kind: 'refused' }) })
      ended.signal.addEventListener('abort', () => {
        stop()
        resolve()
      }, { once: true })
    })
    // Locks exist in secure contexts alone; over plain HTTP each tab keeps a stream of its own.
    const holding = 'locks' in navigator ? navigator.locks.request(`${NAME}-${session.me.user.id}`, { signal: ended.signal }, hold) : hold()
    holding.catch((error: unknown) => {
      if (!(error instanceof DOMException && error.name === 'AbortError')) throw error
    })
    stopStream = () => {
      ended.abort()
      channel.close()
    }
  })

  let stopStream = () => {}
  onBeforeUnmount(() => stopStream())
}
