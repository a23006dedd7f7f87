import { defineRoute } from '../../utils/defineRoute'
import { readiness } from '../../utils/readiness'

export default defineRoute('GET /health', () => readiness())
