/** Pages of one person’s jobs. */
export const up = 'CREATE INDEX IF NOT EXISTS jobsByOwner ON jobs (teamId, deletedAt, ownerId, createdAt, id, stateRank, question, cpuShownMicros)'

export const down = 'DROP INDEX IF EXISTS jobsByOwner ON jobs'
