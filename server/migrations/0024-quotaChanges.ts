/** Creates the table `quotaChanges`: who changed whose quota, and why. */
export const up = `
  CREATE TABLE IF NOT EXISTS quotaChanges (
    id BIGINT NOT NULL AUTO_INCREMENT PRIMARY KEY,
    userId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    byId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    fromCpuMicros BIGINT NOT NULL,
    toCpuMicros BIGINT NOT NULL,
    reason VARCHAR(300) NOT NULL,
    createdAt DATETIME(3) NOT NULL,
    KEY quotaChangesOfUser (userId, id),
    CONSTRAINT quotaChangesUser FOREIGN KEY (userId) REFERENCES users (id),
    CONSTRAINT quotaChangesBy FOREIGN KEY (byId) REFERENCES users (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS quotaChanges'
