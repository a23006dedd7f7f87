import { ledgerPage } from '../models/ledgerPage'
import { defineRoute } from '../utils/defineRoute'
import { useServices } from '../utils/services'

const PAGE = 50

export default defineRoute('GET /api/ledger', ({ auth, query }) =>
  ledgerPage(useServices().db, auth.user.id, { cursor: query.cursor, limit: query.limit ?? PAGE }))
