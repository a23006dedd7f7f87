import { isOpen } from '~/utils/jobWords'
import { jobSummarySchema, type JobSummary, type StreamEvent } from '#shared/schemas/api'

/** A job as the event stream tells of it: the same for the whole team. */
export type TeamJob = Extract<StreamEvent, { type: 'job' }>['job']
/** What the event stream says of a job's waiting and end. */
export type JobOutlook = Extract<StreamEvent, { type: 'outlook' }>['jobs'][number]

const told = jobSummarySchema.omit({ own: true, waiting: true, eta: true }).strip()

/** A job's summary for one reader after news of it: what was said of waiting and end holds on while the job is in the same state. */
export function summaryOf(news: TeamJob, known: Pick<JobSummary, 'state' | 'waiting' | 'eta'> | undefined, readerId: string | undefined): JobSummary {
  const job = told.parse(news)
  const holds = known && isOpen(job) ? known : { waiting: null, eta: null }
  return { ...job, own: job.owner.id === readerId, waiting: job.state === 'queued' ? holds.waiting : null, eta: holds.eta }
}

/** A job with a new outlook; one that has begun since does not wait again. */
export function withOutlook<T extends Pick<JobSummary, 'state' | 'waiting' | 'eta'>>(job: T, outlook: JobOutlook | undefined): T {
  if (!outlook || !isOpen(job)) return job
  return { ...job, waiting: job.state === 'queued' ? outlook.waiting : null, eta: outlook.eta }
}
