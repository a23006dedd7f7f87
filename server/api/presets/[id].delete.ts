import { Op } from 'sequelize'
import { defineRoute } from '../../utils/defineRoute'
import { requireOwner } from '../../utils/jobs'
import { HttpProblem } from '../../utils/problems'
import { useServices } from '../../utils/services'

export default defineRoute('DELETE /api/presets/:id', async ({ auth, id }) => {
  const { Preset } = useServices().db.models
  const preset = await Preset.findOne({ where: { id, teamId: auth.team.id, archivedAt: { [Op.is]: null } }, attributes: ['id', 'ownerId'] })
  if (!preset) throw new HttpProblem('not-found')
  requireOwner(auth, preset)
  await Preset.update({ archivedAt: new Date() }, { where: { id } })
  return null
})
