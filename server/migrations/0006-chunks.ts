/** Creates the table `chunks`. */
export const up = `
  CREATE TABLE IF NOT EXISTS chunks (
    id BIGINT NOT NULL AUTO_INCREMENT PRIMARY KEY,
    jobId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    ordinal INT NOT NULL,
    firstTrial INT NOT NULL,
    trialCount INT NOT NULL,
    predictedCpuMicros BIGINT NOT NULL,
    state ENUM('ready', 'queued', 'running', 'done', 'cancelled', 'failed') NOT NULL DEFAULT 'ready',
    attempt INT NOT NULL DEFAULT 0,
    starts INT NOT NULL DEFAULT 0,
    workerId VARCHAR(64) NULL,
    queuedAt DATETIME(3) NULL,
    startedAt DATETIME(3) NULL,
    heartbeatAt DATETIME(3) NULL,
    finishedAt DATETIME(3) NULL,
    progress SMALLINT NOT NULL DEFAULT 0,
    cpuMicros BIGINT NOT NULL DEFAULT 0,
    payload LONGBLOB NULL,
    checksum CHAR(64) CHARACTER SET ascii COLLATE ascii_bin NULL,
    error VARCHAR(1000) NULL,
    UNIQUE KEY chunksOrdinal (jobId, ordinal),
    KEY chunksState (state, id),
    CONSTRAINT chunksOfJob FOREIGN KEY (jobId) REFERENCES jobs (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS chunks'
