import { defineRoute } from '../../../utils/defineRoute'
import { findTeamJob, presentDetail } from '../../../utils/jobs'
import { useServices } from '../../../utils/services'

export default defineRoute('GET /api/jobs/:id', async ({ auth, id }) => {
  const { db } = useServices()
  return presentDetail(db, auth, await findTeamJob(db, auth, id))
})
