/** Pages of the list by state, newest first within each. */
export const up = 'CREATE INDEX IF NOT EXISTS jobsByState ON jobs (teamId, deletedAt, stateRank, createdAt DESC, id DESC, ownerId, question, cpuShownMicros)'

export const down = 'DROP INDEX IF EXISTS jobsByState ON jobs'
