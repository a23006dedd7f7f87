import { getRequestIP } from 'h3'
import { openSession } from '../utils/auth'
import { defineRoute } from '../utils/defineRoute'
import { presentMe } from '../utils/me'
import { checkPassword } from '../utils/passwords'
import { HttpProblem } from '../utils/problems'
import { useServices } from '../utils/services'

export default defineRoute('POST /api/session', async ({ event, body }) => {
  const { db, throttle } = useServices()
  const address = getRequestIP(event) ?? ''
  const verdict = await throttle.take(body.email, address)
  if (!verdict.allowed) throw new HttpProblem('too-many-requests', {}, { 'Retry-After': String(verdict.retryAfterSeconds) })
  const user = await db.models.User.findOne({ where: { email: body.email } })
  const matches = await checkPassword(user?.passwordHash, body.password)
  if (!user || !matches || !user.active) throw new HttpProblem('sign-in-refused')
  await throttle.clear(body.email, address)
  await openSession(event, user.id)
  const team = await db.models.Team.findByPk(user.teamId, { rejectOnEmpty: true })
  return presentMe(db, { user, team })
})
