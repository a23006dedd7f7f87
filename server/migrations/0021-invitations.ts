/** Creates the table `invitations`: those that are open, one for an address in a team. */
export const up = `
  CREATE TABLE IF NOT EXISTS invitations (
    id CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL PRIMARY KEY,
    teamId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    email VARCHAR(254) NOT NULL,
    role ENUM('researcher', 'student', 'admin') NOT NULL,
    tokenHash CHAR(64) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    invitedById CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    createdAt DATETIME(3) NOT NULL,
    expiresAt DATETIME(3) NOT NULL,
    UNIQUE KEY invitationsToken (tokenHash),
    UNIQUE KEY invitationsOnce (teamId, email),
    CONSTRAINT invitationsOfTeam FOREIGN KEY (teamId) REFERENCES teams (id),
    CONSTRAINT invitationsByUser FOREIGN KEY (invitedById) REFERENCES users (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS invitations'
