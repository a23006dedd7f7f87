import { setResponseHeader } from 'h3'
import { defineRoute } from '../../../utils/defineRoute'
import { findTeamJob, resultOf } from '../../../utils/jobs'
import { HttpProblem } from '../../../utils/problems'
import { useServices } from '../../../utils/services'

export default defineRoute('GET /api/jobs/:id/paths', async ({ event, auth, id }) => {
  const { db } = useServices()
  const result = await resultOf(db, await findTeamJob(db, auth, id))
  if (!result) throw new HttpProblem('conflict', { detail: 'No part of this job is done yet.' })
  setResponseHeader(event, 'Content-Type', 'application/octet-stream')
  return Buffer.from(result.paths)
})
