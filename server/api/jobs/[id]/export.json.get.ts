import { setResponseHeader } from 'h3'
import { defineRoute } from '../../../utils/defineRoute'
import { exportSource } from '../../../utils/exportSource'
import { findTeamJob, presentSummaries } from '../../../utils/jobs'
import { useServices } from '../../../utils/services'

export default defineRoute('GET /api/jobs/:id/export.json', async ({ event, auth, id }) => {
  const { db } = useServices()
  const job = await findTeamJob(db, auth, id)
  const { spec, answer } = await exportSource(db, job)
  const [summary] = await presentSummaries(db, auth, [job])
  // Why it waits and when it ends are of the moment; a file is kept.
  const { waiting: _waiting, eta: _eta, ...about } = summary!
  setResponseHeader(event, 'Content-Disposition', `attachment; filename="farpole-${id}.json"`)
  return {
    format: 'farpole-job', formatVersion: 1, job: about, spec, specHash: job.specHash, seed: job.seed, engineVersion: job.engineVersion, answer,
  } as const
})
