import { setResponseHeader } from 'h3'
import { defineRoute } from '../../../utils/defineRoute'
import { requireTable } from '../../../utils/exportTables'
import { findTeamJob } from '../../../utils/jobs'
import { useServices } from '../../../utils/services'

export default defineRoute('GET /api/jobs/:id/export-columns.json', async ({ event, auth, id, query }) => {
  const job = await findTeamJob(useServices().db, auth, id)
  const { columns } = requireTable(query.table, job.question)
  setResponseHeader(event, 'Content-Disposition', `attachment; filename="farpole-${id}-${query.table}-columns.json"`)
  return { table: query.table, columns: [...columns] }
})
