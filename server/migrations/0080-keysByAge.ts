/** Lets old keys be found without reading all. */
export const up = 'ALTER TABLE idempotencyKeys ADD INDEX IF NOT EXISTS keysByAge (createdAt)'

export const down = 'ALTER TABLE idempotencyKeys DROP INDEX IF EXISTS keysByAge'
