import { deriveNumbers } from '#shared/physics/derived'
import { planJob, priceJob } from '#shared/physics/engine'
import { PhysicsError } from '#shared/physics/errors'
import { deterministicPath } from '#shared/physics/path'
import { prepareProblem } from '#shared/physics/problem'
import { collinearProblem, writeErrorCurve, writeErrors } from '#shared/physics/writeError'
import type { Problem } from '#shared/physics/problem'
import type { JobSpec } from '#shared/schemas/job'
import { FAILURE_RULE } from '~/utils/bench/preview'
import type { PreviewErrors, PreviewReply, PreviewRequest } from '~/utils/bench/preview'

/** More samples than pixels across the strip and enough for each turn of the sphere's path. */
const SAMPLES = 1600
/** Widths of the line of write errors. */
const WIDTHS = 100

const say = (reply: PreviewReply) => self.postMessage(reply)

self.onmessage = ({ data: { id, spec, secondsPerTrialStep } }: MessageEvent<PreviewRequest>) => {
  const started = performance.now()
  try {
    const problem = prepareProblem(spec)
    const { numbers, cautions } = deriveNumbers(spec, problem)
    const plan = planJob(spec, problem)
    // Words and numbers are there at once; the path follows.
    say({ id, kind: 'numbers', numbers: { spec, numbers, cautions, energy: problem.landscape, plan, cpuSeconds: priceJob(spec, secondsPerTrialStep, plan) } })
    say({ id, kind: 'path', path: { spec, path: deterministicPath(spec, SAMPLES, problem), elapsedMs: performance.now() - started } })
    say({ id, kind: 'errors', errors: errorsOf(spec, problem) })
  }
  catch (error) {
    if (error instanceof PhysicsError) say({ id, kind: 'refused', path: [...error.path], message: error.message })
    else say({ id, kind: 'failed', message: error instanceof Error ? error.message : String(error) })
  }
}

function errorsOf(spec: JobSpec, problem: Problem): PreviewErrors {
  const started = performance.now()
  const rule = spec.question.kind === 'motion' ? FAILURE_RULE : spec.question.failureRule
  const collinear = collinearProblem(spec, problem)
  if (typeof collinear === 'string') return { spec, rule, solution: null, reason: collinear, elapsedMs: 0 }
  const curve = writeErrorCurve(collinear, rule, WIDTHS)
  const [error = 0] = writeErrors(collinear, [spec.write.width], rule)
  return { spec, rule, solution: { curve, error }, reason: null, elapsedMs: performance.now() - started }
}
