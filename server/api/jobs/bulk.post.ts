import { bulkAct } from '../../utils/bulk'
import { defineRoute } from '../../utils/defineRoute'
import { useServices } from '../../utils/services'

export default defineRoute('POST /api/jobs/bulk', async ({ event, auth, body, idempotencyKey }) => {
  const request = { path: event.path.split('?')[0] ?? '', id: event.context.requestId ?? '' }
  return { results: await bulkAct(useServices().db, auth, body, { key: idempotencyKey, request }) }
})
