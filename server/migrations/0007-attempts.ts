/** Creates the table `attempts`. */
export const up = `
  CREATE TABLE IF NOT EXISTS attempts (
    id BIGINT NOT NULL AUTO_INCREMENT PRIMARY KEY,
    chunkId BIGINT NOT NULL,
    attempt INT NOT NULL,
    workerId VARCHAR(64) NOT NULL,
    outcome ENUM('running', 'done', 'lost', 'killed', 'cancelled', 'failed') NOT NULL DEFAULT 'running',
    cpuMicros BIGINT NOT NULL DEFAULT 0,
    startedAt DATETIME(3) NOT NULL,
    endedAt DATETIME(3) NULL,
    error VARCHAR(1000) NULL,
    UNIQUE KEY attemptsNumber (chunkId, attempt),
    CONSTRAINT attemptsOfChunk FOREIGN KEY (chunkId) REFERENCES chunks (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS attempts'
