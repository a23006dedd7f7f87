import { readCaughtMail } from '../utils/caughtMail'
import { defineRoute } from '../utils/defineRoute'
import { HttpProblem } from '../utils/problems'
import { useServices } from '../utils/services'

export default defineRoute('GET /api/demo-mail', async () => {
  const { env, demoMailDirectory } = useServices().settings
  if (env === 'production' || demoMailDirectory === null) throw new HttpProblem('not-found')
  return { mails: await readCaughtMail(demoMailDirectory) }
})
