import { defineRoute } from '../../../utils/defineRoute'
import { replyPreset } from '../../../utils/presets'
import { useServices } from '../../../utils/services'

export default defineRoute('GET /api/presets/:id', ({ event, auth, id }) => replyPreset(useServices().db, auth, event, id))
