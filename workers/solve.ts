import { readFileSync, writeFileSync } from 'node:fs'
import { parseArgs } from 'node:util'
import { z } from 'zod'
import { DEFAULT_SECONDS_PER_TRIAL_STEP, chunkJob, mergeChunks, openChunk } from '#shared/physics/engine'
import { PhysicsError } from '#shared/physics/errors'
import { jobSpecSchema } from '#shared/schemas/job'
import type { JobSpec } from '#shared/schemas/job'
import { packPaths } from '../server/models/results'

const HELP = `Answers one job without portal, database or queue.

  npm run solve -- job.json          the answer as JSON on standard output
  npm run solve -- -                 the job from standard input
  npm run solve -- --schema          the JSON Schema of a job
  npm run solve -- job.json --paths FILE
                                     the paths as well: packed arrays, as the portal stores them

The same job and seed give the same bytes as the portal. Exit codes: 0 answered, 1 no file or no room to write, 2 the job is not right.
`

/** The job has faults; each line names a field by its JSON pointer. */
class JobFaults extends Error {
  constructor(readonly lines: readonly string[]) {
    super(`The job needs attention:\n${lines.map(line => `  ${line}`).join('\n')}`)
  }
}

const pointer = (path: readonly PropertyKey[]) => path.map(key => `/${String(key).replace(/~/g, '~0').replace(/\//g, '~1')}`).join('') || '/'

function readJob(text: string): JobSpec {
  let content: unknown
  try {
    content = JSON.parse(text)
  }
  catch (error) {
    throw new JobFaults([`/: not JSON (${error instanceof Error ? error.message : 'unreadable'})`])
  }
  const read = jobSpecSchema.safeParse(content)
  if (!read.success) throw new JobFaults(read.error.issues.map(issue => `${pointer(issue.path)}: ${issue.message}`))
  return read.data
}

function solve(spec: JobSpec) {
  try {
    const parts = chunkJob(spec, DEFAULT_SECONDS_PER_TRIAL_STEP).map(({ firstTrial, trialCount }) => {
      const run = openChunk(spec, firstTrial, trialCount)
      while (run.done < run.total) run.advance()
      return run.finish()
    })
    return mergeChunks(spec, parts)
  }
  catch (error) {
    if (error instanceof PhysicsError) throw new JobFaults([`${pointer(error.path)}: ${error.message}`])
    throw error
  }
}

function main() {
  const { values, positionals } = parseArgs({
    allowPositionals: true,
    options: { schema: { type: 'boolean' }, help: { type: 'boolean', short: 'h' }, paths: { type: 'string' } },
  })
  if (values.help) return process.stdout.write(HELP)
  if (values.schema) return process.stdout.write(`${JSON.stringify(z.toJSONSchema(jobSpecSchema, { io: 'input' }), null, 2)}\n`)
  const [file, ...more] = positionals
  if (file === undefined || more.length > 0) throw new Error(`Name one file with a job.\n\n${HELP}`)
  const { answer, paths } = solve(readJob(readFileSync(file === '-' ? 0 : file, 'utf8')))
  if (values.paths !== undefined) writeFileSync(values.paths, packPaths(answer, paths))
  process.stdout.write(`${JSON.stringify(answer)}\n`)
}

try {
  main()
}
catch (error) {
  console.error(error instanceof Error ? error.message : error)
  process.exitCode = error instanceof JobFaults ? 2 : 1
}
