/** Pages of the list by time; like its siblings it holds what the list filters by, so that no row is read in vain. */
export const up = 'CREATE INDEX IF NOT EXISTS jobsByTime ON jobs (teamId, deletedAt, createdAt, id, stateRank, ownerId, question, cpuShownMicros)'

export const down = 'DROP INDEX IF EXISTS jobsByTime ON jobs'
