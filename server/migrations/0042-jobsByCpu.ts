/** Pages of the list by CPU time. */
export const up = 'CREATE INDEX IF NOT EXISTS jobsByCpu ON jobs (teamId, deletedAt, cpuShownMicros, id, stateRank, ownerId, question, createdAt)'

export const down = 'DROP INDEX IF EXISTS jobsByCpu ON jobs'
