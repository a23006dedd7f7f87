import { randomUUID } from 'node:crypto'
import { defineEventHandler, setResponseHeader } from 'h3'
import { useLog } from '../utils/log'

/** Gives each request an id and, when its reply has gone, a line in the log. */
export default defineEventHandler((event) => {
  const requestId = randomUUID()
  event.context.requestId = requestId
  setResponseHeader(event, 'X-Request-Id', requestId)
  const started = performance.now()
  const { method } = event
  const path = event.path.split('?')[0]
  event.node.res.once?.('close', () => {
    const log = path?.startsWith('/api/') ? 'info' : 'debug'
    useLog()[log]({ requestId, ...event.context.logged, method, path, status: event.node.res.statusCode, ms: Math.round(performance.now() - started) }, 'request')
  })
})
