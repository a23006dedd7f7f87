import { setResponseHeader } from 'h3'
import { fromCursor, listJobs, toCursor } from '../../models/jobList'
import { defineRoute } from '../../utils/defineRoute'
import { presentSummaries } from '../../utils/jobs'
import { HttpProblem } from '../../utils/problems'
import { useServices } from '../../utils/services'

const PAGE = 50

export default defineRoute('GET /api/jobs', async ({ event, auth, query }) => {
  const { db } = useServices()
  const { cursor, limit = PAGE, sort = '-created', ...filter } = query
  const after = cursor === undefined ? null : fromCursor(cursor, sort)
  if (cursor !== undefined && !after) {
    throw new HttpProblem('invalid', { errors: [{ pointer: '/cursor', detail: 'Take the cursor from the page before, read in the same order.' }] })
  }
  const { jobs, next: place } = await listJobs(db, auth.team.id, filter, { sort, after, limit })
  const next = place && toCursor(place)
  if (next) {
    const params = new URLSearchParams({ limit: String(limit), ...(query.sort ? { sort } : {}), ...filter, cursor: next })
    setResponseHeader(event, 'Link', `</api/jobs?${params}>; rel="next"`)
  }
  return { jobs: await presentSummaries(db, auth, jobs), next }
})
