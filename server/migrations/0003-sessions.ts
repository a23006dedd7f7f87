/** Creates the table `sessions`. */
export const up = `
  CREATE TABLE IF NOT EXISTS sessions (
    id CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL PRIMARY KEY,
    tokenHash CHAR(64) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    userId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    createdAt DATETIME(3) NOT NULL,
    lastSeenAt DATETIME(3) NOT NULL,
    expiresAt DATETIME(3) NOT NULL,
    revokedAt DATETIME(3) NULL,
    userAgent VARCHAR(300) NOT NULL DEFAULT '',
    UNIQUE KEY sessionsToken (tokenHash),
    KEY sessionsUser (userId),
    CONSTRAINT sessionsOfUser FOREIGN KEY (userId) REFERENCES users (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS sessions'
