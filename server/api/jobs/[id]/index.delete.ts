import { deleteJob } from '../../../models/endJobs'
import { defineRoute } from '../../../utils/defineRoute'
import { findTeamJob, requireOwner } from '../../../utils/jobs'
import { HttpProblem } from '../../../utils/problems'
import { useServices } from '../../../utils/services'

export default defineRoute('DELETE /api/jobs/:id', async ({ auth, id }) => {
  const { db } = useServices()
  const job = await findTeamJob(db, auth, id)
  requireOwner(auth, job)
  if (!await deleteJob(db, job)) throw new HttpProblem('conflict', { detail: 'This job has not ended. Cancel it first.' })
  return null
})
