/** Creates the table `users`. */
export const up = `
  CREATE TABLE IF NOT EXISTS users (
    id CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL PRIMARY KEY,
    teamId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    email VARCHAR(254) NOT NULL,
    name VARCHAR(120) NOT NULL,
    role ENUM('researcher', 'student', 'admin') NOT NULL,
    passwordHash VARCHAR(255) NOT NULL,
    active TINYINT(1) NOT NULL DEFAULT 1,
    quotaCpuMicros BIGINT NOT NULL,
    virtualTimeMicros BIGINT NOT NULL DEFAULT 0,
    createdAt DATETIME(3) NOT NULL,
    updatedAt DATETIME(3) NOT NULL,
    UNIQUE KEY usersEmail (email),
    KEY usersTeam (teamId, id),
    CONSTRAINT usersOfTeam FOREIGN KEY (teamId) REFERENCES teams (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS users'
