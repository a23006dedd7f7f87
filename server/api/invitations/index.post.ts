import { invite } from '../../models/invite'
import { defineRoute } from '../../utils/defineRoute'
import { presentInvitations } from '../../utils/invitations'
import { requireMail } from '../../utils/mail'
import { useServices } from '../../utils/services'

export default defineRoute('POST /api/invitations', async ({ auth, body }) => {
  const { db, settings, throttle } = useServices()
  requireMail(settings)
  await throttle.pass('invite', auth.user.id)
  const row = await invite(db, { ...body, teamId: auth.team.id, teamName: auth.team.name, byId: auth.user.id, byName: auth.user.name })
  const [invitation] = await presentInvitations(db, [row])
  return invitation!
})
