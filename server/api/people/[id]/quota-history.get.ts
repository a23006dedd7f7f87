import { toSeconds } from '../../../models/quota'
import { defineRoute } from '../../../utils/defineRoute'
import { namesOf } from '../../../utils/people'
import { HttpProblem } from '../../../utils/problems'
import { useServices } from '../../../utils/services'

const MOST = 200

export default defineRoute('GET /api/people/:id/quota-history', async ({ auth, id }) => {
  const { db } = useServices()
  if (await db.models.User.count({ where: { id, teamId: auth.team.id } }) === 0) throw new HttpProblem('not-found')
  const rows = await db.models.QuotaChange.findAll({ where: { userId: id }, order: [['id', 'DESC']], limit: MOST })
  const named = await namesOf(db, rows.map(row => row.byId))
  return {
    entries: rows.map(({ createdAt, byId, fromCpuMicros, toCpuMicros, reason }) => ({
      at: createdAt.toISOString(), by: named(byId), fromCpuSeconds: toSeconds(fromCpuMicros), toCpuSeconds: toSeconds(toCpuMicros), reason,
    })),
  }
})
