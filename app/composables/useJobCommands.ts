import type { JobSummary } from '#shared/schemas/api'
import type { BulkAction } from '#shared/schemas/jobList'
import { mayDo, rowResult, summaryWords, type RowResult } from '~/utils/jobs/bulk'

/** Commands on the list's jobs: asked first, done at once for all, and answered in the rows. */
export function useJobCommands() {
  const list = useJobListStore()
  const session = useSessionStore()
  const notices = useNoticesStore()

  const asked = ref<{ action: BulkAction, jobs: readonly JobSummary[], key: string } | null>(null)
  const busy = ref(false)
  const results = ref<Record<string, RowResult>>({})
  const summary = ref('')
  const actor = computed(() => ({ mayWrite: session.mayWrite, isAdmin: session.isAdmin }))

  function ask(action: BulkAction, ids: readonly string[]) {
    const jobs = list.jobs.filter(job => ids.includes(job.id))
    if (jobs.some(job => mayDo(action, job, actor.value))) asked.value = { action, jobs, key: crypto.randomUUID() }
    else if (jobs.length > 0) notices.say({ cancel: 'Only jobs of yours that wait or run can be cancelled.', delete: 'Only jobs of yours that have ended can be deleted.', rerun: 'You cannot queue jobs.' }[action])
  }

  async function confirm() {
    const command = asked.value
    if (!command || busy.value) return
    busy.value = true
    try {
      const ids = command.jobs.filter(job => mayDo(command.action, job, actor.value)).map(job => job.id)
      const answered = await list.act(command.action, ids, command.key)
      results.value = Object.fromEntries(answered.map(result => [result.id, rowResult(command.action, result)]))
      summary.value = summaryWords(command.action, answered)
      asked.value = null
    }
    finally {
      busy.value = false
    }
  }

  function dismiss() {
    if (!busy.value) asked.value = null
  }
  function forget() {
    results.value = {}
    summary.value = ''
  }
  return { asked, busy, results, summary, actor, ask, confirm, dismiss, forget }
}
