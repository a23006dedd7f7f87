/** Adds to `users` which mails each person wants. */
export const up = 'ALTER TABLE users ADD COLUMN IF NOT EXISTS notifyFinished TINYINT(1) NOT NULL DEFAULT 1, ADD COLUMN IF NOT EXISTS notifyFailed TINYINT(1) NOT NULL DEFAULT 1'

export const down = 'ALTER TABLE users DROP COLUMN IF EXISTS notifyFinished, DROP COLUMN IF EXISTS notifyFailed'
