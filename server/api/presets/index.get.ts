import { Op } from 'sequelize'
import { visibleTo } from '../../models/presets'
import { defineRoute } from '../../utils/defineRoute'
import { presentPresets } from '../../utils/presets'
import { useServices } from '../../utils/services'

export default defineRoute('GET /api/presets', async ({ auth, query }) => {
  const { db } = useServices()
  const seen = visibleTo({ userId: auth.user.id, teamId: auth.team.id })
  const rows = await db.models.Preset.findAll({
    where: query.archived ? seen : { [Op.and]: [seen, { archivedAt: { [Op.is]: null } }] }, order: [['id', 'ASC']], limit: 500,
  })
  return { presets: await presentPresets(db, auth, rows) }
})
