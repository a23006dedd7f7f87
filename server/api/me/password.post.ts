import { changePassword } from '../../models/reset'
import { openSession } from '../../utils/auth'
import { defineRoute } from '../../utils/defineRoute'
import { checkPassword, hashChosen } from '../../utils/passwords'
import { HttpProblem } from '../../utils/problems'
import { useServices } from '../../utils/services'

const refusal = (field: string, detail: string) => new HttpProblem('invalid', { errors: [{ pointer: `/${field}`, detail }] })

export default defineRoute('POST /api/me/password', async ({ event, auth, body }) => {
  const { db, throttle } = useServices()
  await throttle.pass('password', auth.user.id)
  const { passwordHash, email, name } = await db.models.User.findByPk(auth.user.id, { rejectOnEmpty: true })
  if (!await checkPassword(passwordHash, body.current)) throw refusal('current', 'This is not your present password.')
  if (body.password === body.current) throw refusal('password', 'This is your present password.')
  const to = await hashChosen(body.password, [name, email])
  if (!await changePassword(db, { userId: auth.user.id, from: passwordHash, to })) throw refusal('current', 'Your password was changed a moment ago.')
  // Whoever copied this session's cookie is left without one, too.
  await openSession(event, { id: auth.user.id, passwordHash: to })
  await throttle.clear('password', auth.user.id)
  return null
})
