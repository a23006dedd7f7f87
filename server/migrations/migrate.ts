import mariadb from 'mariadb'
import { SequelizeStorage, Umzug } from 'umzug'
import { DRIVER_OPTIONS, closeDatabase, openDatabase } from '../models/database'
import type { DatabaseSettings } from '../models/database'
import { MIGRATIONS } from './index'

const LOCK_SECONDS = 60

/**
 * Brings the schema up to date, or to nothing with `direction: 'down'`; answers with the names of the steps taken.
 * A named lock, held on a connection of its own, lets one migrator in at a time; the others wait and find nothing to do.
 * Throws when the lock is not had within a minute.
 */
export async function migrate(settings: DatabaseSettings, direction: 'up' | 'down' = 'up'): Promise<string[]> {
  const lock = await mariadb.createConnection({
    ...DRIVER_OPTIONS, host: settings.host, port: settings.port, user: settings.user, password: settings.password, database: settings.name,
  })
  try {
    const name = `farpole-migrate-${settings.name}`.slice(0, 64)
    const rows = await lock.query<{ got: number | null }[]>('SELECT GET_LOCK(?, ?) AS got', [name, LOCK_SECONDS])
    if (rows[0]?.got !== 1) throw new Error(`Another migration is still running after ${LOCK_SECONDS} s.`)
    const db = openDatabase({ ...settings, poolMax: 1 })
    try {
      const umzug = new Umzug({
        migrations: MIGRATIONS.map(({ name, up, down }) => ({
          name,
          up: async () => { await db.sequelize.query(up) },
          down: async () => { await db.sequelize.query(down) },
        })),
        storage: new SequelizeStorage({ sequelize: db.sequelize, modelName: 'migrations' }),
        logger: undefined,
      })
      const steps = direction === 'up' ? await umzug.up() : await umzug.down({ to: 0 })
      return steps.map(step => step.name)
    }
    finally {
      await closeDatabase(db)
    }
  }
  finally {
    await lock.end()
  }
}
