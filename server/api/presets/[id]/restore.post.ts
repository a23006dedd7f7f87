import { defineRoute } from '../../../utils/defineRoute'
import { findOwnPreset, replyPreset } from '../../../utils/presets'
import { useServices } from '../../../utils/services'

export default defineRoute('POST /api/presets/:id/restore', async ({ event, auth, id }) => {
  const { db } = useServices()
  await findOwnPreset(db, auth, id)
  await db.models.Preset.update({ archivedAt: null }, { where: { id } })
  return replyPreset(db, auth, event, id)
})
