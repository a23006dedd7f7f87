import { setResponseHeader } from 'h3'
import { submitJob } from '../../models/submit'
import { defineRoute } from '../../utils/defineRoute'
import { presentDetail } from '../../utils/jobs'
import { useServices } from '../../utils/services'

export default defineRoute('POST /api/jobs', async ({ event, auth, body, query, idempotencyKey }) => {
  const { db } = useServices()
  const preset = query.preset !== undefined && query.version !== undefined ? { id: query.preset, version: query.version } : null
  const { jobId, replayed } = await submitJob(db, { userId: auth.user.id, teamId: auth.team.id, spec: body, idempotencyKey, preset })
  event.context.logged = { user: auth.user.id, job: jobId }
  if (replayed) setResponseHeader(event, 'Idempotency-Replayed', 'true')
  setResponseHeader(event, 'Location', `/api/jobs/${jobId}`)
  const job = await db.models.Job.findByPk(jobId, { attributes: { exclude: ['answer', 'paths'] }, rejectOnEmpty: true })
  return presentDetail(db, auth, job)
})
