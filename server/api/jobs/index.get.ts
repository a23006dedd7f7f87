import { setResponseHeader } from 'h3'
import { Op } from 'sequelize'
import { idSchema } from '#shared/schemas/api'
import { JOB_SUMMARY_COLUMNS } from '../../models/jobs'
import { defineRoute } from '../../utils/defineRoute'
import { presentSummaries } from '../../utils/jobs'
import { HttpProblem } from '../../utils/problems'
import { useServices } from '../../utils/services'

const PAGE = 50

export default defineRoute('GET /api/jobs', async ({ event, auth, query }) => {
  const { db } = useServices()
  const limit = query.limit ?? PAGE
  if (query.cursor !== undefined && !idSchema.safeParse(query.cursor).success) {
    throw new HttpProblem('invalid', { errors: [{ pointer: '/cursor', detail: 'Take the cursor from the page before.' }] })
  }
  const rows = await db.models.Job.findAll({
    where: { teamId: auth.team.id, deletedAt: { [Op.is]: null }, ...(query.cursor ? { id: { [Op.lt]: query.cursor } } : {}) },
    attributes: [...JOB_SUMMARY_COLUMNS],
    order: [['id', 'DESC']],
    limit: limit + 1,
  })
  const page = rows.slice(0, limit)
  const next = rows.length > limit ? page[page.length - 1]!.id : null
  if (next) setResponseHeader(event, 'Link', `</api/jobs?limit=${limit}&cursor=${next}>; rel="next"`)
  return { jobs: await presentSummaries(db, auth, page), next }
})
