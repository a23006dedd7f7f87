/** Creates the table `presetVersions`: what a preset said at each of its versions, for ever. */
export const up = `
  CREATE TABLE IF NOT EXISTS presetVersions (
    presetId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    version INT NOT NULL,
    name VARCHAR(60) NOT NULL,
    note VARCHAR(500) NOT NULL DEFAULT '',
    content LONGTEXT NOT NULL,
    authorId CHAR(26) CHARACTER SET ascii COLLATE ascii_bin NOT NULL,
    createdAt DATETIME(3) NOT NULL,
    PRIMARY KEY (presetId, version),
    CONSTRAINT presetVersionsOfPreset FOREIGN KEY (presetId) REFERENCES presets (id),
    CONSTRAINT presetVersionsOfAuthor FOREIGN KEY (authorId) REFERENCES users (id)
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS presetVersions'
