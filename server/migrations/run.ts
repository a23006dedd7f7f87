import { readSettings } from '#shared/schemas/settings'
import { closeDatabase, openDatabase } from '../models/database'
import { seedDemo } from '../models/seed'
import { migrate } from './migrate'

/** Command: brings the schema up to date; with `--seed-demo` also adds the demo team when it is not there, `--without-jobs` its people and presets alone. */
async function main() {
  const settings = readSettings(process.env)
  if (process.argv.includes('--seed-demo') && settings.env === 'production') throw new Error('The demo team belongs to the demo alone: it is never added in production.')
  const steps = await migrate(settings.database)
  console.log(steps.length === 0 ? 'The schema is up to date.' : `Applied ${steps.join(', ')}.`)
  if (process.argv.includes('--seed-demo')) {
    const db = openDatabase(settings.database)
    try {
      console.log(await seedDemo(db, { jobs: !process.argv.includes('--without-jobs') }) ? 'Added the demo team.' : 'The demo team is already there.')
    }
    finally {
      await closeDatabase(db)
    }
  }
}

main().catch((error: unknown) => {
  console.error(error instanceof Error ? error.message : error)
  process.exitCode = 1
})
