/** Creates the table `jobs`. */
export const up = `
  CREATE TABLE IF NOT EXISTS jobs (
    id CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL PRIMARY KEY,
    teamId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    ownerId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    state ENUM('queued', 'running', 'done', 'failed', 'cancelled') NOT NULL DEFAULT 'queued',
    question VARCHAR(20) NOT NULL,
    sentence VARCHAR(500) NOT NULL,
    spec LONGTEXT NOT NULL,
    specHash CHAR(64) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    seed INT UNSIGNED NOT NULL,
    engineVersion VARCHAR(20) NOT NULL,
    predictedCpuMicros BIGINT NOT NULL,
    cpuMicros BIGINT NOT NULL DEFAULT 0,
    trials INT NOT NULL,
    chunksTotal INT NOT NULL,
    chunksDone INT NOT NULL DEFAULT 0,
    headline VARCHAR(300) NULL,
    answer LONGTEXT NULL,
    paths LONGBLOB NULL,
    error VARCHAR(1000) NULL,
    settledAt DATETIME(3) NULL,
    createdAt DATETIME(3) NOT NULL,
    startedAt DATETIME(3) NULL,
    finishedAt DATETIME(3) NULL,
    deletedAt DATETIME(3) NULL,
    KEY jobsTeam (teamId, id),
    KEY jobsState (state, id),
    KEY jobsOwner (ownerId, id),
    CONSTRAINT jobsOfTeam FOREIGN KEY (teamId) REFERENCES teams (id),
    CONSTRAINT jobsOfOwner FOREIGN KEY (ownerId) REFERENCES users (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS jobs'
