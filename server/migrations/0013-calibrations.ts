/** Creates the table `calibrations`. */
export const up = `
  CREATE TABLE IF NOT EXISTS calibrations (
    engineVersion VARCHAR(20) NOT NULL PRIMARY KEY,
    secondsPerTrialStep DOUBLE NOT NULL,
    measuredAt DATETIME(3) NOT NULL
  ) ENGINE=InnoDB DEFAULT CHARSET=utf8mb4 COLLATE=utf8mb4_unicode_ci`

export const down = 'DROP TABLE IF EXISTS calibrations'
