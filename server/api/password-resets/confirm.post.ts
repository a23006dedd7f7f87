import { confirmReset, resetOwner } from '../../models/reset'
import { clientAddress } from '../../utils/clientAddress'
import { defineRoute } from '../../utils/defineRoute'
import { hashChosen } from '../../utils/passwords'
import { useServices } from '../../utils/services'

export default defineRoute('POST /api/password-resets/confirm', async ({ event, body }) => {
  const { db, throttle } = useServices()
  await throttle.pass('link-use', clientAddress(event))
  const { name, email } = await resetOwner(db, body.token)
  await confirmReset(db, body.token, await hashChosen(body.password, [name, email]))
  return null
})
