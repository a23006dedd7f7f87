import { editPerson } from '../../../models/editPerson'
import { defineRoute } from '../../../utils/defineRoute'
import { presentPeople } from '../../../utils/people'
import { HttpProblem } from '../../../utils/problems'
import { useServices } from '../../../utils/services'

export default defineRoute('PATCH /api/people/:id', async ({ auth, id, body }) => {
  const { db } = useServices()
  if (!await editPerson(db, { id: auth.user.id, teamId: auth.team.id }, id, body)) throw new HttpProblem('not-found')
  const [person] = await presentPeople(db, await db.models.User.findAll({ where: { id } }))
  return person!
})
