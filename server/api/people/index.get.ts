import { defineRoute } from '../../utils/defineRoute'
import { presentPeople } from '../../utils/people'
import { useServices } from '../../utils/services'

export default defineRoute('GET /api/people', async ({ auth }) => {
  const { db } = useServices()
  const rows = await db.models.User.findAll({ where: { teamId: auth.team.id }, order: [['name', 'ASC'], ['id', 'ASC']], limit: 1000 })
  return { people: await presentPeople(db, rows) }
})
