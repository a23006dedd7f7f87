import { withdrawInvitation } from '../../models/invite'
import { defineRoute } from '../../utils/defineRoute'
import { HttpProblem } from '../../utils/problems'
import { useServices } from '../../utils/services'

export default defineRoute('DELETE /api/invitations/:id', async ({ auth, id }) => {
  if (!await withdrawInvitation(useServices().db, auth.team.id, id)) throw new HttpProblem('not-found')
  return null
})
