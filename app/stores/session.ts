import { z } from 'zod'
import { meSchema, signInSchema, type JobSummary, type Me, type Quota } from '#shared/schemas/api'

/** Who is reading, their team, quota and the price of the engine. `known` is false until the server was asked once. */
export const useSessionStore = defineStore('session', () => {
  const api = useApi()
  const me = ref<Me | null>(null)
  const known = ref(false)

  const role = computed(() => me.value?.user.role ?? null)
  /** Whether the reader's role may change anything at all. */
  const mayWrite = computed(() => role.value === 'researcher' || role.value === 'admin')
  const isAdmin = computed(() => role.value === 'admin')

  /** Reads the session anew; signed out is no error. */
  async function load() {
    try {
      me.value = await api.json('/api/me', meSchema)
    }
    catch (error) {
      if (!(error instanceof ProblemError && error.status === 401)) throw error
      me.value = null
    }
    known.value = true
  }

  /** Throws a ProblemError whose pointers are /email and /password, or a ZodError before anything is sent. */
  async function signIn(email: string, password: string) {
    await api.json('/api/session', z.unknown(), { method: 'POST', body: signInSchema.parse({ email, password }) })
    await load()
  }

  async function signOut() {
    await api.json('/api/session', z.unknown(), { method: 'DELETE' })
    forget()
  }

  /** After the server has ended the session by itself. */
  function forget() {
    me.value = null
    known.value = true
  }

  /** Own jobs that wait or run, as far as was told. */
  function track(job: Pick<JobSummary, 'id' | 'state' | 'owner'>) {
    if (!me.value || job.owner.id !== me.value.user.id) return
    if (!isOpen(job)) untrack(job.id)
    else if (!me.value.openJobs.includes(job.id)) me.value = { ...me.value, openJobs: [job.id, ...me.value.openJobs] }
  }
  function untrack(id: string) {
    if (me.value?.openJobs.includes(id)) me.value = { ...me.value, openJobs: me.value.openJobs.filter(one => one !== id) }
  }

  function setQuota(quota: Quota) {
    if (me.value) me.value = { ...me.value, quota }
  }

  return { me, known, role, mayWrite, isAdmin, load, signIn, signOut, forget, track, untrack, setQuota }
})
