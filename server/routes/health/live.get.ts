import { ENGINE_VERSION } from '#shared/physics/engine'
import { defineRoute } from '../../utils/defineRoute'

export default defineRoute('GET /health/live', () => ({ status: 'live' as const, engineVersion: ENGINE_VERSION }))
