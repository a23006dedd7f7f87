import { QueryTypes } from 'sequelize'
import { ENGINE_VERSION } from '#shared/physics/engine'
import { defineRoute } from '../utils/defineRoute'
import { useServices } from '../utils/services'

export default defineRoute('GET /api/health', async ({ query }) => {
  if (query.ready) await useServices().db.sequelize.query('SELECT 1', { type: QueryTypes.SELECT })
  return { status: 'ok', engineVersion: ENGINE_VERSION } as const
})
