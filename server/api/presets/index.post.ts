import { setResponseHeader } from 'h3'
import { createPreset } from '../../models/presets'
import { inTransaction } from '../../models/transaction'
import { defineRoute } from '../../utils/defineRoute'
import { replyPreset } from '../../utils/presets'
import { useServices } from '../../utils/services'

export default defineRoute('POST /api/presets', async ({ event, auth, body }) => {
  const { db } = useServices()
  const { id } = await inTransaction(db, tx => createPreset(db, tx, { userId: auth.user.id, teamId: auth.team.id }, body))
  setResponseHeader(event, 'Location', `/api/presets/${id}`)
  return replyPreset(db, auth, event, id)
})
