import { defineRoute } from '../utils/defineRoute'
import { presentQueue } from '../utils/queue'
import { useServices } from '../utils/services'

export default defineRoute('GET /api/queue', ({ auth }) => presentQueue(useServices().db, auth.team.id))
