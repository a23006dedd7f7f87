/** Creates the table `resets`: the one password reset that is open for a user. */
export const up = `
  CREATE TABLE IF NOT EXISTS resets (
    userId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL PRIMARY KEY,
    tokenHash CHAR(64) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    createdAt DATETIME(3) NOT NULL,
    expiresAt DATETIME(3) NOT NULL,
    UNIQUE KEY resetsToken (tokenHash),
    CONSTRAINT resetsOfUser FOREIGN KEY (userId) REFERENCES users (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS resets'
