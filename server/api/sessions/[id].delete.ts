import { Op } from 'sequelize'
import { defineRoute } from '../../utils/defineRoute'
import { HttpProblem } from '../../utils/problems'
import { useServices } from '../../utils/services'

export default defineRoute('DELETE /api/sessions/:id', async ({ auth, id }) => {
  const [ended] = await useServices().db.models.Session.update({ revokedAt: new Date() }, { where: { id, userId: auth.user.id, revokedAt: { [Op.is]: null } } })
  if (ended === 0) throw new HttpProblem('not-found')
  return null
})
