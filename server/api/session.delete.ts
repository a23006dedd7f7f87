import { closeSession } from '../utils/auth'
import { defineRoute } from '../utils/defineRoute'

export default defineRoute('DELETE /api/session', async ({ event }) => {
  await closeSession(event)
  return null
})
