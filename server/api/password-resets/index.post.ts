import { RESET_MINUTES } from '#shared/schemas/accounts'
import { wishForReset } from '../../models/reset'
import { clientAddress } from '../../utils/clientAddress'
import { defineRoute } from '../../utils/defineRoute'
import { requireMail } from '../../utils/mail'
import { useServices } from '../../utils/services'

export default defineRoute('POST /api/password-resets', async ({ event, body }) => {
  const { db, settings, throttle } = useServices()
  requireMail(settings)
  const address = clientAddress(event)
  await throttle.pass('resets', address)
  await throttle.pass('reset', body.email, address)
  await wishForReset(db, body.email)
  return { validMinutes: RESET_MINUTES }
})
