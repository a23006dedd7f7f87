/** Creates the table `events`. */
export const up = `
  CREATE TABLE IF NOT EXISTS events (
    id BIGINT NOT NULL AUTO_INCREMENT PRIMARY KEY,
    teamId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    userId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NULL,
    jobId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NULL,
    type VARCHAR(20) NOT NULL,
    data LONGTEXT NOT NULL,
    createdAt DATETIME(3) NOT NULL,
    KEY eventsCreated (createdAt)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS events'
