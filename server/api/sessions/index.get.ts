import { ownSessions } from '../../utils/auth'
import { defineRoute } from '../../utils/defineRoute'
import { useServices } from '../../utils/services'

export default defineRoute('GET /api/sessions', async ({ auth }) => ({ sessions: await ownSessions(useServices().db, auth) }))
