import { defineRoute } from '../../../utils/defineRoute'
import { deleteFor } from '../../../utils/jobActs'
import { useServices } from '../../../utils/services'

export default defineRoute('DELETE /api/jobs/:id', async ({ auth, id }) => {
  await deleteFor(useServices().db, auth, id)
  return null
})
