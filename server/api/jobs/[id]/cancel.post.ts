import { cancelJob } from '../../../models/endJobs'
import { defineRoute } from '../../../utils/defineRoute'
import { findTeamJob, presentDetail, requireOwner } from '../../../utils/jobs'
import { HttpProblem } from '../../../utils/problems'
import { useServices } from '../../../utils/services'

export default defineRoute('POST /api/jobs/:id/cancel', async ({ auth, id }) => {
  const { db } = useServices()
  requireOwner(auth, await findTeamJob(db, auth, id))
  const changed = await cancelJob(db, id)
  const job = await findTeamJob(db, auth, id)
  if (!changed && job.state !== 'cancelled') throw new HttpProblem('conflict', { detail: 'This job has ended already.' })
  return presentDetail(db, auth, job)
})
