import { Op } from 'sequelize'
import { defineRoute } from '../../utils/defineRoute'
import { presentPresets } from '../../utils/presets'
import { useServices } from '../../utils/services'

export default defineRoute('GET /api/presets', async ({ auth }) => {
  const { db } = useServices()
  const rows = await db.models.Preset.findAll({ where: { teamId: auth.team.id, archivedAt: { [Op.is]: null } }, order: [['id', 'ASC']], limit: 500 })
  return { presets: await presentPresets(db, auth, rows) }
})
