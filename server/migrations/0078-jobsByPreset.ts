/** Pages of the jobs made from one preset. */
export const up = 'CREATE INDEX IF NOT EXISTS jobsByPreset ON jobs (teamId, deletedAt, presetId, createdAt, id, stateRank, ownerId, question, cpuShownMicros)'

export const down = 'DROP INDEX IF EXISTS jobsByPreset ON jobs'
