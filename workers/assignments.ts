import type { Database } from '../server/models/database'
import type { ClaimedChunk } from '../server/queue/claim'
import { beat, unwantedClaims } from '../server/queue/heartbeats'
import type { Solver } from './solver'

/** Why the worker itself ended a chunk's solver. */
export type StopReason = 'unwanted' | 'fenced' | 'released'

/** A chunk that this worker runs. */
export interface Assignment { claim: ClaimedChunk, solver: Solver, stopped: StopReason | null }

/** The chunks that this worker runs now. */
export class Assignments {
  private readonly all = new Set<Assignment>()

  add(assignment: Assignment): void {
    this.all.add(assignment)
  }

  remove(assignment: Assignment): void {
    this.all.delete(assignment)
  }

  /** Tells the database that they are being run, and how far they are. */
  async beat(db: Database): Promise<void> {
    await beat(db, [...this.all].map(({ claim, solver }) => {
      const { share, cpuMicros } = solver.progress
      return { ...claim, progress: share, cpuMicros }
    }))
  }

  /** Ends those that are not wanted any more: cancelled, failed, or given to another worker. */
  async watch(db: Database): Promise<void> {
    const watched = [...this.all].filter(({ stopped }) => stopped === null)
    const ends = await unwantedClaims(db, watched.map(({ claim }) => claim))
    for (const { claim, why } of ends) {
      const assignment = watched.find(candidate => candidate.claim === claim)
      // The answer may be of the time before its result was stored.
      if (assignment && this.all.has(assignment)) stop(assignment, why)
    }
  }

  /** Ends them all, to be run by others. */
  release(): void {
    for (const assignment of this.all) stop(assignment, 'released')
  }
}

function stop(assignment: Assignment, why: StopReason): void {
  assignment.stopped ??= why
  assignment.solver.end(`it was stopped (${why})`)
}
