/** Creates the table `presets`. */
export const up = `
  CREATE TABLE IF NOT EXISTS presets (
    id CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL PRIMARY KEY,
    teamId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    ownerId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    name VARCHAR(60) NOT NULL,
    note VARCHAR(500) NOT NULL DEFAULT '',
    content LONGTEXT NOT NULL,
    archivedAt DATETIME(3) NULL,
    createdAt DATETIME(3) NOT NULL,
    updatedAt DATETIME(3) NOT NULL,
    KEY presetsTeam (teamId, id),
    CONSTRAINT presetsOfTeam FOREIGN KEY (teamId) REFERENCES teams (id),
    CONSTRAINT presetsOfOwner FOREIGN KEY (ownerId) REFERENCES users (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS presets'
