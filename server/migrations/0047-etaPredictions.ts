/** Creates the table `etaPredictions`: the range that was shown for a job's end at each stage of it, to be compared with the end. */
export const up = `
  CREATE TABLE IF NOT EXISTS etaPredictions (
    jobId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    stage TINYINT NOT NULL,
    madeAt DATETIME(3) NOT NULL,
    medianSeconds DOUBLE NOT NULL,
    spread DOUBLE NOT NULL,
    lowSeconds DOUBLE NOT NULL,
    highSeconds DOUBLE NOT NULL,
    PRIMARY KEY (jobId, stage),
    KEY etaPredictionsMade (madeAt),
    CONSTRAINT etaPredictionsOfJob FOREIGN KEY (jobId) REFERENCES jobs (id) ON DELETE CASCADE
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS etaPredictions'
