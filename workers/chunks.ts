import type { Database } from '../server/models/database'
import { failChunk, finishChunk, loseAttempt, noteLateUse, releaseChunk, stopChunk } from '../server/queue/attempts'
import type { Claim } from '../server/queue/claim'
import { claimChunk } from '../server/queue/claim'
import { MergeRefused, SolverDied, mergeJob } from '../server/queue/merge'
import type { Merge } from '../server/queue/merge'
import type { ChunkMessage } from '../server/queue/names'
import type { Assignment, Assignments } from './assignments'
import type { Logger } from './log'
import { patiently } from './patience'
import { Solver } from './solver'
import type { Outcome } from './solver'

/** CPU-seconds that a chunk may use: so many times its estimate, and something for small ones. */
const cpuLimit = (predictedCpuMicros: number) => 30 + 20 * predictedCpuMicros / 1e6
const MERGE_CPU_SECONDS = 300

/** What running a chunk needs. */
export interface Workshop {
  db: Database
  workerId: string
  log: Logger
  assignments: Assignments
  /** Solvers that are free. */
  solvers: Solver[]
  /** Ends the patience with a database that is away. */
  stop: AbortSignal
}

/** Runs the chunk that a message names, unless there is nothing to do any more, and records how it ended. */
export async function runChunk(workshop: Workshop, message: ChunkMessage): Promise<void> {
  const { db, workerId, log, assignments, solvers, stop } = workshop
  const solver = solvers.pop()
  // The message is dropped; its row stays queued and is found again.
  if (!solver) throw new Error('No solver is free.')
  try {
    const asked = performance.now()
    const claim = await patiently(() => claimChunk(db, workerId, message.chunkId), stop)
    if (!claim) return
    const began = performance.now()
    const assignment: Assignment = { claim, solver, stopped: null }
    assignments.add(assignment)
    try {
      const { spec, firstTrial, trialCount } = claim
      const outcome = await solver.perform({ kind: 'chunk', spec, firstTrial, trialCount }, cpuLimit(claim.predictedCpuMicros))
      const ended = performance.now()
      const recorded = await record(workshop, assignment, outcome)
      log.debug({ chunk: claim.chunkId, job: claim.jobId, claimMs: began - asked, solveMs: ended - began, recordMs: performance.now() - ended }, 'chunk ended')
      if (recorded !== 'last') return
    }
    finally {
      assignments.remove(assignment)
    }
    await finishJob(workshop, claim.jobId, solver)
  }
  finally {
    solvers.push(solver)
    if (!stop.aborted) solver.warm()
  }
}

/** Writes down how a chunk ended; answers `last` when its job has no other left to do. */
async function record(workshop: Workshop, { claim, stopped }: Assignment, outcome: Outcome): Promise<'last' | 'recorded'> {
  const { db, stop, log } = workshop
  const cpuMicros = Math.round(outcome.cpuMicros)
  const keep = <T>(write: () => Promise<T>) => patiently(write, stop)
  if (outcome.kind === 'chunk') {
    const stored = await keep(() => finishChunk(db, claim, outcome.payload, cpuMicros))
    if (stored === 'last') return 'last'
    if (stored === 'fenced') await refused(workshop, claim, cpuMicros)
  }
  else if (outcome.kind === 'refused') {
    log.warn({ chunk: claim.chunkId, job: claim.jobId, reason: outcome.message }, 'chunk failed')
    await keep(() => failChunk(db, claim, { reason: outcome.message, cpuMicros }))
  }
  else if (stopped === 'unwanted') {
    await keep(() => stopChunk(db, claim, cpuMicros))
  }
  else if (stopped === 'released') {
    await keep(() => releaseChunk(db, claim, cpuMicros))
  }
  else if (stopped === 'fenced') {
    await refused(workshop, claim, cpuMicros)
  }
  else {
    const reason = outcome.kind === 'died' ? outcome.message : 'it answered another question'
    const lost = await keep(() => loseAttempt(db, claim, { reason, cpuMicros }))
    log.warn({ chunk: claim.chunkId, job: claim.jobId, attempt: claim.attempt, reason, lost }, 'solver lost')
  }
  return 'recorded'
}

async function refused({ db, stop, log }: Workshop, claim: Claim, cpuMicros: number): Promise<void> {
  log.warn({ chunk: claim.chunkId, job: claim.jobId, attempt: claim.attempt }, 'late result refused')
  await patiently(() => noteLateUse(db, claim, cpuMicros), stop)
}

async function finishJob({ db, stop, log }: Workshop, jobId: string, solver: Solver): Promise<void> {
  try {
    const result = await patiently(() => mergeJob(db, jobId, mergeIn(solver)), stop)
    log.info({ job: jobId, result }, 'job finished')
  }
  catch (error) {
    if (!(error instanceof SolverDied)) throw error
    log.warn({ job: jobId, reason: error.message }, 'merge lost')
  }
}

/** Merging in a solver process. */
export const mergeIn = (solver: Solver): Merge => async (spec, parts) => {
  const outcome = await solver.perform({ kind: 'merge', spec, parts }, MERGE_CPU_SECONDS)
  if (outcome.kind === 'merge') return outcome
  if (outcome.kind === 'refused') throw new MergeRefused(outcome.message)
  throw new SolverDied(outcome.kind === 'died' ? outcome.message : 'the solver answered another question')
}

/** Merging in a process of its own, which ends afterwards. */
export const mergeAside = (script: string): Merge => async (spec, parts) => {
  const solver = new Solver(script)
  try {
    return await mergeIn(solver)(spec, parts)
  }
  finally {
    solver.close()
  }
}
