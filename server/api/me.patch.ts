import { defineRoute } from '../utils/defineRoute'
import { presentMe } from '../utils/me'
import { useServices } from '../utils/services'

export default defineRoute('PATCH /api/me', async ({ auth, body }) => {
  const { db } = useServices()
  await db.models.User.update(body, { where: { id: auth.user.id } })
  const user = await db.models.User.findByPk(auth.user.id, { rejectOnEmpty: true })
  return presentMe(db, { user, team: auth.team })
})
