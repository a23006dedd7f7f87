/** Pins the version of a preset that a job was made from, with the name that it had. */
export const up = `
  ALTER TABLE jobs
    ADD COLUMN IF NOT EXISTS presetId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NULL AFTER sentence,
    ADD COLUMN IF NOT EXISTS presetVersion INT NULL AFTER presetId,
    ADD COLUMN IF NOT EXISTS presetName VARCHAR(60) NULL AFTER presetVersion,
    ADD COLUMN IF NOT EXISTS presetChanged BOOLEAN NULL AFTER presetName,
    ADD KEY IF NOT EXISTS jobsPreset (presetId, id),
    ADD CONSTRAINT jobsOfPreset FOREIGN KEY IF NOT EXISTS (presetId) REFERENCES presets (id)`

export const down = `
  ALTER TABLE jobs
    DROP FOREIGN KEY IF EXISTS jobsOfPreset, DROP KEY IF EXISTS jobsPreset,
    DROP COLUMN IF EXISTS presetId, DROP COLUMN IF EXISTS presetVersion, DROP COLUMN IF EXISTS presetName, DROP COLUMN IF EXISTS presetChanged`
