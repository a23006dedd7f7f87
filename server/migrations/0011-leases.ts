/** Creates the table `leases`. */
export const up = `
  CREATE TABLE IF NOT EXISTS leases (
    name VARCHAR(40) NOT NULL PRIMARY KEY,
    holder VARCHAR(64) NOT NULL,
    expiresAt DATETIME(3) NOT NULL
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS leases'
