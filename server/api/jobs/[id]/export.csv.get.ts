import { Readable } from 'node:stream'
import { setResponseHeaders } from 'h3'
import { csvBlocks } from '../../../utils/csv'
import { defineRoute } from '../../../utils/defineRoute'
import { exportSource } from '../../../utils/exportSource'
import { requireTable } from '../../../utils/exportTables'
import { findTeamJob } from '../../../utils/jobs'
import { useServices } from '../../../utils/services'

export default defineRoute('GET /api/jobs/:id/export.csv', async ({ event, auth, id, query }) => {
  const { db } = useServices()
  const source = await exportSource(db, await findTeamJob(db, auth, id))
  const { columns, rows } = requireTable(query.table, source.answer.kind)
  setResponseHeaders(event, {
    'Content-Type': 'text/csv; charset=utf-8; header=present',
    'Content-Disposition': `attachment; filename="farpole-${id}-${query.table}.csv"`,
    'Link': `</api/jobs/${id}/export-columns.json?table=${query.table}>; rel="describedby"`,
  })
  return Readable.from(csvBlocks(columns.map(column => column.header), rows(source)))
})
