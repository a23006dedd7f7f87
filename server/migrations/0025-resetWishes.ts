/** Creates the table `resetWishes`: addresses for which a new password was asked, whether or not anybody has them. */
export const up = `
  CREATE TABLE IF NOT EXISTS resetWishes (
    email VARCHAR(254) NOT NULL PRIMARY KEY,
    requestedAt DATETIME(3) NOT NULL
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS resetWishes'
