import { z } from 'zod'
import { personSchema, type Person } from '#shared/schemas/accounts'

/** The team's people and their quotas; for admins. */
export const usePeopleStore = defineStore('people', () => {
  const api = useApi()
  const people = ref<Person[]>([])
  const loaded = ref(false)

  async function load() {
    const reply = await api.json('/api/people', z.strictObject({ people: z.array(personSchema) }))
    people.value = reply.people
    loaded.value = true
  }

  /** Sets the CPU-seconds a person may use in the rolling window. */
  async function setQuota(id: string, quotaCpuSeconds: number) {
    const person = await api.json(`/api/people/${id}`, personSchema, { method: 'PATCH', body: { quotaCpuSeconds, reason: 'Set in the table of people.' } })
    people.value = people.value.map(known => known.id === id ? person : known)
  }

  return { people, loaded, load, setQuota }
})
