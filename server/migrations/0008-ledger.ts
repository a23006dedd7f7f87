/** Creates the table `ledger`. */
export const up = `
  CREATE TABLE IF NOT EXISTS ledger (
    id BIGINT NOT NULL AUTO_INCREMENT PRIMARY KEY,
    userId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    jobId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    kind ENUM('reserve', 'release', 'charge') NOT NULL,
    cpuMicros BIGINT NOT NULL,
    effectiveAt DATETIME(3) NOT NULL,
    createdAt DATETIME(3) NOT NULL,
    UNIQUE KEY ledgerOnce (jobId, kind),
    KEY ledgerWindow (userId, effectiveAt),
    CONSTRAINT ledgerOfUser FOREIGN KEY (userId) REFERENCES users (id),
    CONSTRAINT ledgerOfJob FOREIGN KEY (jobId) REFERENCES jobs (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS ledger'
