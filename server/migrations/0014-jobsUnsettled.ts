/** Finds the few jobs that are not settled yet without reading the many that are. */
export const up = 'CREATE INDEX IF NOT EXISTS jobsUnsettled ON jobs (settledAt, state)'

export const down = 'DROP INDEX IF EXISTS jobsUnsettled ON jobs'
