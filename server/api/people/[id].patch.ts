import { announceQuota } from '../../models/events'
import { toMicros } from '../../models/quota'
import { inTransaction } from '../../models/transaction'
import { defineRoute } from '../../utils/defineRoute'
import { presentPeople } from '../../utils/people'
import { HttpProblem } from '../../utils/problems'
import { useServices } from '../../utils/services'

export default defineRoute('PATCH /api/people/:id', async ({ auth, id, body }) => {
  const { db } = useServices()
  const where = { id, teamId: auth.team.id }
  const changed = await inTransaction(db, async (tx) => {
    if (await db.models.User.count({ where, transaction: tx }) === 0) return false
    await db.models.User.update({ quotaCpuMicros: toMicros(body.quotaCpuSeconds) }, { where, transaction: tx })
    await announceQuota(db, tx, id)
    return true
  })
  if (!changed) throw new HttpProblem('not-found')
  const [person] = await presentPeople(db, await db.models.User.findAll({ where }))
  return person!
})
