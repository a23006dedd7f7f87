import { Op } from 'sequelize'
import { defineRoute } from '../../utils/defineRoute'
import { presentInvitations } from '../../utils/invitations'
import { useServices } from '../../utils/services'

export default defineRoute('GET /api/invitations', async ({ auth }) => {
  const { db } = useServices()
  const rows = await db.models.Invitation.findAll({
    where: { teamId: auth.team.id, expiresAt: { [Op.gt]: new Date() } }, order: [['createdAt', 'DESC'], ['id', 'DESC']], limit: 1000,
  })
  return { invitations: await presentInvitations(db, rows) }
})
