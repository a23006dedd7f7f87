import { z } from 'zod'
import type { Role } from '#shared/schemas/api'
import {
  invitationCreateSchema, invitationListSchema, invitationSchema, quotaHistorySchema, personListSchema, personSchema,
  type Invitation, type PersonEdit, type QuotaChange, type Person,
} from '#shared/schemas/accounts'

/** The team's people, their quotas, and who is invited; for admins. */
export const usePeopleStore = defineStore('people', () => {
  const api = useApi()
  const people = ref<Person[]>([])
  const invitations = ref<Invitation[]>([])
  /** Changes of quota by person, newest first; undefined until they are asked for. */
  const histories = ref<Record<string, QuotaChange[]>>({})

  async function load() {
    const [team, invited] = await Promise.all([api.json('/api/people', personListSchema), api.json('/api/invitations', invitationListSchema)])
    people.value = team.people
    invitations.value = invited.invitations
  }

  /** Throws a ProblemError whose pointers are those of the change (/quotaCpuSeconds, /reason). */
  async function change(id: string, edit: PersonEdit) {
    const person = await api.json(`/api/people/${id}`, personSchema, { method: 'PATCH', body: edit })
    people.value = people.value.map(known => known.id === id ? person : known)
    if (edit.quotaCpuSeconds !== undefined && histories.value[id]) await loadHistory(id)
  }

  async function loadHistory(id: string) {
    const { entries } = await api.json(`/api/people/${id}/quota-history`, quotaHistorySchema)
    histories.value = { ...histories.value, [id]: entries }
  }

  /** Throws a ZodError before anything is sent, or a ProblemError with the pointers /email and /role. */
  async function invite(email: string, role: Role) {
    const invitation = await api.json('/api/invitations', invitationSchema, { method: 'POST', body: invitationCreateSchema.parse({ email, role }) })
    invitations.value = [invitation, ...invitations.value.filter(known => known.email !== invitation.email)]
    return invitation
  }

  /** The link in its mail leads nowhere from then on. */
  async function withdraw(id: string) {
    await api.json(`/api/invitations/${id}`, z.unknown(), { method: 'DELETE' })
    invitations.value = invitations.value.filter(known => known.id !== id)
  }

  return { people, invitations, histories, load, change, loadHistory, invite, withdraw }
})
