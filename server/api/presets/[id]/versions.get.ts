import { defineRoute } from '../../../utils/defineRoute'
import { findPreset, presentVersions } from '../../../utils/presets'
import { useServices } from '../../../utils/services'

export default defineRoute('GET /api/presets/:id/versions', async ({ auth, id }) => {
  const { db } = useServices()
  await findPreset(db, auth, id)
  const rows = await db.models.PresetVersion.findAll({ where: { presetId: id }, order: [['version', 'DESC']], limit: 500 })
  return { versions: await presentVersions(db, rows) }
})
