import { SharedStream, type StreamNews } from '~/utils/sharedStream'

/** Feeds the stores from the server's event stream, one for all tabs of the browser, while the calling component lives. */
export function useEventStream() {
  const session = useSessionStore()
  const jobs = useJobsStore()
  const router = useRouter()

  /** Reads who is signed in; another person's page is loaded anew, nobody's gives way to the sign-in page. */
  async function look(userId: string) {
    const isUp = await session.load().then(() => true, () => false)
    if (!isUp) return false
    const { path, fullPath } = router.currentRoute.value
    if (session.me === null && path !== '/signin') await navigateTo({ path: '/signin', query: { next: fullPath } })
    else if (session.me !== null && session.me.user.id !== userId) window.location.reload()
    return session.me?.user.id === userId
  }

  function share(userId: string) {
    const take = (news: StreamNews) => {
      if (news.kind === 'refused') void look(userId)
      else if (news.kind === 'back') void look(userId).then(same => same ? jobs.refresh() : undefined)
      else if (news.event.type === 'quota') session.setQuota(news.event.quota)
      else {
        if (news.event.type === 'job') session.track(news.event.job)
        if (news.event.type === 'deleted') session.untrack(news.event.jobId)
        jobs.receive(news.event)
      }
    }
    return new SharedStream({
      name: `farpole-events-${userId}`,
      locks: 'locks' in navigator ? navigator.locks : undefined,
      channel: name => new BroadcastChannel(name),
      open: (tell, late) => keepStream('/api/events', { event: event => tell({ kind: 'event', event }), back: () => tell({ kind: 'back' }), refused: () => tell({ kind: 'refused' }) }, late),
      take,
      isVisible: () => document.visibilityState === 'visible',
    })
  }

  let stream: SharedStream | null = null
  onMounted(() => {
    if (!session.me) return
    stream = share(session.me.user.id)
    stream.start()
    // What happened between the server's rendering and now is not told again.
    if (jobs.showsOpen) void jobs.refresh()
  })
  // A tab that the browser puts to sleep or into its history would keep the stream from the others.
  const sleep = () => stream?.stop()
  const wake = () => {
    stream?.start(true)
    void jobs.refresh()
  }
  useEventListener('pagehide', sleep)
  useEventListener('pageshow', (event: PageTransitionEvent) => event.persisted && wake())
  onMounted(() => {
    document.addEventListener('freeze', sleep)
    document.addEventListener('resume', wake)
  })
  onBeforeUnmount(() => {
    document.removeEventListener('freeze', sleep)
    document.removeEventListener('resume', wake)
  })
  useEventListener(() => import.meta.client ? document : null, 'visibilitychange', () => stream?.ask())
  // Signing out here signs out everywhere.
  watch(() => session.me, (me) => {
    if (me !== null) return
    stream?.tellOthers({ kind: 'refused' })
    stream?.stop()
  })
  onBeforeUnmount(() => stream?.stop())
}
