/** Creates the table `idempotencyKeys`. */
export const up = `
  CREATE TABLE IF NOT EXISTS idempotencyKeys (
    userId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    \`key\` VARCHAR(80) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    bodyHash CHAR(64) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    jobId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    createdAt DATETIME(3) NOT NULL,
    PRIMARY KEY (userId, \`key\`),
    CONSTRAINT keysOfUser FOREIGN KEY (userId) REFERENCES users (id),
    CONSTRAINT keysOfJob FOREIGN KEY (jobId) REFERENCES jobs (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS idempotencyKeys'
