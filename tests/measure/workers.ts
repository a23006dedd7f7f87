import { isMainThread, parentPort, Worker, workerData } from 'node:worker_threads'
import { openKernel } from '#shared/kernels/loader'
import { TrialRunner } from '#shared/numerics/trial'
import type { TrialOutcome, TrialPlan } from '#shared/numerics/trial'

export const name = 'two kernels at once (means something on an idle machine only)'

const SECONDS = 2
const STEPS = 20_000

/** Trial-steps that one thread does within the time. */
function work(first: number): number {
  const dynamics = { damping: 0.01, diagonal: [0, 0, 1], field: [0, 0, 0], reference: [0, 0, 1], torque: { q0: -0.02, q1: 1, q2: 0 }, fieldLikeRatio: 0, noise: 2e-4 } as const
  const plan: TrialPlan = { dynamics, key: [1, 2], side: 1, start: (_, out) => out.set([0.1, 0, Math.sqrt(0.99)]), watched: [{ start: 0, end: 5000, from: 1, to: 1, steps: STEPS }], settling: null }
  const runner = new TrialRunner(plan, openKernel())
  const outcomes = Array.from({ length: runner.lanes }, (): TrialOutcome => ({ crossing: 0, endsNear: false, settlesNear: false, undecided: false, steps: 0 }))
  runner.run(first, outcomes)
  let done = 0
  for (const until = performance.now() + 1000 * SECONDS; performance.now() < until; done += STEPS * runner.lanes) runner.run(first + done, outcomes)
  return done
}

const WORK = 'measure-kernel'
if (!isMainThread && workerData === WORK) parentPort?.postMessage(work(0))

const inThread = () => new Promise<number>((resolve, reject) => {
  const worker = new Worker(new URL(import.meta.url), { workerData: WORK })
  worker.once('message', resolve)
  worker.once('error', reject)
})

export async function measure(): Promise<{ metric: string, value: number, unit: string }[]> {
  const alone = await inThread()
  const both = await Promise.all([inThread(), inThread()])
  return [
    { metric: 'one', value: alone / SECONDS, unit: 'trial-steps/s' },
    { metric: 'two', value: (both[0]! + both[1]!) / SECONDS, unit: 'trial-steps/s' },
    { metric: 'two against one', value: (both[0]! + both[1]!) / alone, unit: '×' },
  ]
}
