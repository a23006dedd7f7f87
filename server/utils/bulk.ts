import type { z } from 'zod'
import type { BulkAction, BulkResult, bulkSchema } from '#shared/schemas/jobList'
import type { Database } from '../models/database'
import type { Auth } from './auth'
import { cancelFor, deleteFor, rerunFor } from './jobActs'
import { errorFields, useLog } from './log'
import { PROBLEMS, presentProblem, toHttpProblem } from './problems'
import type { HttpProblem } from './problems'

const ACTS: Record<BulkAction, (db: Database, auth: Auth, id: string, key: string) => Promise<{ newId?: string }>> = {
  cancel: async (db, auth, id) => {
    await cancelFor(db, auth, id)
    return {}
  },
  delete: async (db, auth, id) => {
    await deleteFor(db, auth, id)
    return {}
  },
  rerun: async (db, auth, id, key) => ({ newId: await rerunFor(db, auth, id, key) }),
}

/**
 * Does one thing to many jobs, each by the rules of the single command; one that is refused keeps none of the others back.
 * Once the service is away, the rest is answered without being tried.
 */
export async function bulkAct(
  db: Database, auth: Auth, { ids, action }: z.output<typeof bulkSchema>, { key, request }: { key: string, request: { path: string, id: string } },
): Promise<BulkResult[]> {
  const results: BulkResult[] = []
  let away: HttpProblem | null = null
  for (const id of ids) {
    try {
      if (away) throw away
      results.push({ id, ok: true, ...await ACTS[action](db, auth, id, key) })
    }
    catch (error) {
      const problem = toHttpProblem(error)
      if (problem.type === 'unavailable') away = problem
      if (PROBLEMS[problem.type].status === 500) useLog().error({ requestId: request.id, jobId: id, action, ...errorFields(error) }, problem.message)
      results.push({ id, ok: false, problem: presentProblem(problem, request) })
    }
  }
  return results
}
