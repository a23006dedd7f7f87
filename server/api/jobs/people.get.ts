import { askersOf } from '../../models/jobList'
import { defineRoute } from '../../utils/defineRoute'
import { useServices } from '../../utils/services'

export default defineRoute('GET /api/jobs/people', async ({ auth }) => ({ people: await askersOf(useServices().db, auth.team.id) }))
