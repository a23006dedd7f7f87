/** Counts a preset's versions and says whether the team sees it; those there are stay shared. */
export const up = `
  ALTER TABLE presets
    ADD COLUMN IF NOT EXISTS version INT NOT NULL DEFAULT 1 AFTER content,
    ADD COLUMN IF NOT EXISTS shared BOOLEAN NOT NULL DEFAULT TRUE AFTER version`

export const down = 'ALTER TABLE presets DROP COLUMN IF EXISTS version, DROP COLUMN IF EXISTS shared'
