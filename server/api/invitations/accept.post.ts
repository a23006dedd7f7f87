import { acceptInvitation, lookAtInvitation } from '../../models/invite'
import { openSession } from '../../utils/auth'
import { clientAddress } from '../../utils/clientAddress'
import { defineRoute } from '../../utils/defineRoute'
import { presentMe } from '../../utils/me'
import { hashChosen } from '../../utils/passwords'
import { useServices } from '../../utils/services'

export default defineRoute('POST /api/invitations/accept', async ({ event, body: { token, name, password } }) => {
  const { db, throttle } = useServices()
  await throttle.pass('link-use', clientAddress(event))
  const { email } = await lookAtInvitation(db, token)
  const user = await acceptInvitation(db, token, { name, passwordHash: await hashChosen(password, [name, email]) })
  await openSession(event, user)
  return presentMe(db, { user, team: await db.models.Team.findByPk(user.teamId, { rejectOnEmpty: true }) })
})
