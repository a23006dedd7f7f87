/** Creates the table `mails`: what is to be sent, and what has become of it. */
export const up = `
  CREATE TABLE IF NOT EXISTS mails (
    id CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL PRIMARY KEY,
    userId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NULL,
    recipient VARCHAR(254) NOT NULL,
    kind VARCHAR(20) NOT NULL,
    data TEXT NOT NULL,
    dedupeKey VARCHAR(100) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    state ENUM('waiting', 'sending', 'sent', 'failed') NOT NULL DEFAULT 'waiting',
    attempts INT NOT NULL DEFAULT 0,
    nextAttemptAt DATETIME(3) NOT NULL,
    expiresAt DATETIME(3) NULL,
    claim VARCHAR(64) NULL,
    error VARCHAR(300) NULL,
    createdAt DATETIME(3) NOT NULL,
    sentAt DATETIME(3) NULL,
    UNIQUE KEY mailsOnce (dedupeKey),
    KEY mailsDue (state, nextAttemptAt),
    KEY mailsUser (userId, createdAt)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS mails'
