/** Finds a job's next ready chunk, and those that run, without passing all that are done. */
export const up = 'CREATE INDEX IF NOT EXISTS chunksByState ON chunks (jobId, state, ordinal)'

export const down = 'DROP INDEX IF EXISTS chunksByState ON chunks'
