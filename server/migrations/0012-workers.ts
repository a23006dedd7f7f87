/** Creates the table `workers`. */
export const up = `
  CREATE TABLE IF NOT EXISTS workers (
    id VARCHAR(64) NOT NULL PRIMARY KEY,
    host VARCHAR(255) NOT NULL,
    pid INT NOT NULL,
    slots INT NOT NULL,
    startedAt DATETIME(3) NOT NULL,
    heartbeatAt DATETIME(3) NOT NULL
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS workers'
