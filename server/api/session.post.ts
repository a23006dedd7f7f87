import { openSession } from '../utils/auth'
import { clientAddress } from '../utils/clientAddress'
import { defineRoute } from '../utils/defineRoute'
import { presentMe } from '../utils/me'
import { checkPassword } from '../utils/passwords'
import { HttpProblem } from '../utils/problems'
import { useServices } from '../utils/services'

export default defineRoute('POST /api/session', async ({ event, body }) => {
  const { db, throttle } = useServices()
  const address = clientAddress(event)
  await throttle.pass('sign-in', body.email, address)
  const user = await db.models.User.findOne({ where: { email: body.email } })
  const matches = await checkPassword(user?.passwordHash, body.password)
  if (!user || !matches || !user.active) throw new HttpProblem('sign-in-refused')
  await throttle.clear('sign-in', body.email, address)
  await openSession(event, user)
  const team = await db.models.Team.findByPk(user.teamId, { rejectOnEmpty: true })
  return presentMe(db, { user, team })
})
