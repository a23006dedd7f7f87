import { getRequestHeader } from 'h3'
import { defineRoute } from '../utils/defineRoute'
import { useServices } from '../utils/services'

export default defineRoute('GET /api/events', async ({ event, auth }) => {
  const { req, res } = event.node
  const lastId = getRequestHeader(event, 'last-event-id')
  res.writeHead(200, { 'Content-Type': 'text/event-stream; charset=utf-8', 'X-Accel-Buffering': 'no' })
  event._handled = true
  if (req.method === 'HEAD') {
    res.end()
    return
  }
  await useServices().hub.serve({
    sessionId: auth.sessionId,
    userId: auth.user.id,
    teamId: auth.team.id,
    role: auth.user.role,
    response: res,
    after: lastId !== undefined && /^\d{1,15}$/.test(lastId) ? Number(lastId) : undefined,
  })
})
