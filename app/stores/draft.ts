import { openDesk } from '~/utils/bench/desk'

/** What is on the bench. */
export const useDraftStore = defineStore('draft', () => {
  const session = useSessionStore()
  const jobs = useJobsStore()
  return openDesk({ userId: () => session.me?.user.id ?? null, submit: jobs.submit })
})
