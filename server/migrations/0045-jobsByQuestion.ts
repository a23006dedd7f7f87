/** Pages of the jobs with one question. */
export const up = 'CREATE INDEX IF NOT EXISTS jobsByQuestion ON jobs (teamId, deletedAt, question, createdAt, id, stateRank, ownerId, cpuShownMicros)'

export const down = 'DROP INDEX IF EXISTS jobsByQuestion ON jobs'
