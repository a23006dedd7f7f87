import { caughtMailListSchema, type CaughtMail } from '#shared/schemas/accounts'

/** Mails that the demo has caught instead of sending, newest first. */
export const useCaughtMailStore = defineStore('caughtMail', () => {
  const api = useApi()
  const mails = ref<CaughtMail[]>([])

  async function load() {
    mails.value = (await api.json('/api/demo-mail', caughtMailListSchema)).mails
  }

  return { mails, load }
})
