import { ENGINE_VERSION } from '#shared/physics/engine'
import { defineRoute } from '../utils/defineRoute'
import { openApiDocument } from '../utils/openapi'
import { useServices } from '../utils/services'

export default defineRoute('GET /api/openapi.json', () => ({
  ...openApiDocument({ baseUrl: useServices().settings.baseUrl, version: ENGINE_VERSION }),
}))
