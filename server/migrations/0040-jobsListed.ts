/**
 * Columns that the list of jobs searches and sorts by, kept by the database from the others: the words in lower case
 * without the narrow spaces (U+202F) that group digits, the place of the state in the list's order, and the CPU time shown.
 */
export const up = `
  ALTER TABLE jobs
    ADD COLUMN IF NOT EXISTS searched VARBINARY(2400) AS (CAST(LOWER(REPLACE(CONCAT_WS(' ', sentence, headline), CHAR(14844079 USING utf8mb4), '')) AS BINARY)) STORED,
    ADD COLUMN IF NOT EXISTS stateRank TINYINT AS (state + 0) STORED,
    ADD COLUMN IF NOT EXISTS cpuShownMicros BIGINT AS (IF(state IN ('queued', 'running') OR cpuMicros = 0, predictedCpuMicros, cpuMicros)) STORED`

export const down = 'ALTER TABLE jobs DROP COLUMN IF EXISTS searched, DROP COLUMN IF EXISTS stateRank, DROP COLUMN IF EXISTS cpuShownMicros'
