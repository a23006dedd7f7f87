import { lookAtInvitation } from '../../models/invite'
import { clientAddress } from '../../utils/clientAddress'
import { defineRoute } from '../../utils/defineRoute'
import { useServices } from '../../utils/services'

export default defineRoute('POST /api/invitations/look', async ({ event, body }) => {
  const { db, throttle } = useServices()
  await throttle.pass('link', clientAddress(event))
  return lookAtInvitation(db, body.token)
})
