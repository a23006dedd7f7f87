import type { QueueUse } from '#shared/schemas/accounts'
import type { Database } from '../models/database'
import { loadsByUser, workersInUse } from '../models/queueUse'
import type { Load } from '../models/queueUse'
import { toSeconds } from '../models/quota'
import { namesOf } from './people'

/** Who uses the queue now: people of one team by name, the other teams together. */
export async function presentQueue(db: Database, teamId: string): Promise<QueueUse> {
  const loads = await loadsByUser(db)
  const ours = loads.filter(load => load.teamId === teamId).sort((a, b) => b.runningChunks - a.runningChunks || b.waitingCpuMicros - a.waitingCpuMicros)
  const named = await namesOf(db, ours.map(load => load.userId))
  const workers = await workersInUse(db)
  return {
    users: ours.map(load => ({ person: named(load.userId), ...presentLoads([load]) })),
    elsewhere: presentLoads(loads.filter(load => load.teamId !== teamId)),
    slots: workers.reduce((slots, worker) => slots + worker.slots, 0),
    workers: workers.map(worker => ({ ...worker, heartbeatAt: worker.heartbeatAt.toISOString() })),
  }
}

function presentLoads(loads: readonly Load[]) {
  const sum = (part: 'runningChunks' | 'waitingJobs' | 'waitingCpuMicros') => loads.reduce((total, load) => total + load[part], 0)
  return { runningChunks: sum('runningChunks'), waitingJobs: sum('waitingJobs'), waitingCpuSeconds: toSeconds(sum('waitingCpuMicros')) }
}
