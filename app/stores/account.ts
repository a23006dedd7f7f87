import { z } from 'zod'
import { meSchema } from '#shared/schemas/api'
import {
  ledgerPageSchema, meEditSchema, passwordChangeSchema, sessionListSchema, type LedgerLine, type MeEdit, type OwnSession,
} from '#shared/schemas/accounts'

/** The reader's own account: name, notifications, password, sessions and the ledger of CPU time. */
export const useAccountStore = defineStore('account', () => {
  const api = useApi()
  const session = useSessionStore()
  const sessions = ref<OwnSession[]>([])
  const entries = ref<LedgerLine[]>([])
  /** Cursor of the ledger's next page; null at its end. */
  const next = ref<string | null>(null)

  async function load() {
    await Promise.all([loadSessions(), loadLedger()])
  }

  async function loadSessions() {
    sessions.value = (await api.json('/api/sessions', sessionListSchema)).sessions
  }

  async function loadLedger() {
    const page = await api.json('/api/ledger', ledgerPageSchema)
    entries.value = page.entries
    next.value = page.next
    session.setQuota(page.balance)
  }

  async function loadOlder() {
    if (next.value === null) return
    const page = await api.json('/api/ledger', ledgerPageSchema, { query: { cursor: next.value } })
    const known = new Set(entries.value.map(entry => entry.id))
    entries.value = [...entries.value, ...page.entries.filter(entry => !known.has(entry.id))]
    next.value = page.next
    session.setQuota(page.balance)
  }

  /** Puts entries written since in front of those that are here; reads anew when there are more of them than a page has. */
  async function loadNewer() {
    const page = await api.json('/api/ledger', ledgerPageSchema)
    const known = new Set(entries.value.map(entry => entry.id))
    const newer = page.entries.filter(entry => !known.has(entry.id))
    if (newer.length === page.entries.length && page.next !== null) return loadLedger()
    entries.value = [...newer, ...entries.value]
  }

  /** Throws a ZodError before anything is sent, or a ProblemError with the pointer /name. */
  async function edit(change: MeEdit) {
    session.me = await api.json('/api/me', meSchema, { method: 'PATCH', body: meEditSchema.parse(change) })
  }

  /** Ends every other session. Throws a ZodError before anything is sent, or a ProblemError with the pointers /current and /password. */
  async function changePassword(current: string, password: string) {
    await api.json('/api/me/password', z.unknown(), { method: 'POST', body: passwordChangeSchema.parse({ current, password }) })
    await loadSessions()
  }

  async function endSession(id: string) {
    await api.json(`/api/sessions/${id}`, z.unknown(), { method: 'DELETE' })
    sessions.value = sessions.value.filter(known => known.id !== id)
  }

  return { sessions, entries, next, load, loadOlder, loadNewer, edit, changePassword, endSession }
})
