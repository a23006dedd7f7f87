/** Pages of a search: the words lie in the index, so that a word that no job has costs one pass over it. */
export const up = 'CREATE INDEX IF NOT EXISTS jobsByWords ON jobs (teamId, deletedAt, createdAt, id, searched, stateRank, ownerId, question, cpuShownMicros)'

export const down = 'DROP INDEX IF EXISTS jobsByWords ON jobs'
