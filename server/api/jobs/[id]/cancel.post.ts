import { defineRoute } from '../../../utils/defineRoute'
import { cancelFor } from '../../../utils/jobActs'
import { presentDetail } from '../../../utils/jobs'
import { useServices } from '../../../utils/services'

export default defineRoute('POST /api/jobs/:id/cancel', async ({ auth, id }) => {
  const { db } = useServices()
  return presentDetail(db, auth, await cancelFor(db, auth, id))
})
