import { defineRoute } from '../utils/defineRoute'
import { presentMe } from '../utils/me'
import { useServices } from '../utils/services'

export default defineRoute('GET /api/me', ({ auth }) => presentMe(useServices().db, auth))
