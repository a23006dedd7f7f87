import { setResponseHeader } from 'h3'
import { defineRoute } from '../../utils/defineRoute'
import { presentPresets } from '../../utils/presets'
import { useServices } from '../../utils/services'

export default defineRoute('POST /api/presets', async ({ event, auth, body }) => {
  const { db } = useServices()
  const { name, note, content } = body
  const row = await db.models.Preset.create({ teamId: auth.team.id, ownerId: auth.user.id, name, note, content: JSON.stringify(content) })
  const [preset] = await presentPresets(db, auth, [row])
  setResponseHeader(event, 'Location', `/api/presets/${row.id}`)
  return preset!
})
