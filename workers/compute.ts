import os from 'node:os'
import { mergeChunks, openChunk } from '#shared/physics/engine'
import { packPaths } from '../server/models/results'
import { measurePrice } from './calibration'
import type { Reply, Task } from './protocol'

/** The process that computes: takes tasks from its parent by messages, one at a time, and ends with it. */

const SLICE_MS = 80
const REPORT_MS = 250
/** Pages and the database come first on a machine that also serves them. */
const NICE = 15

os.setPriority(NICE)
process.on('disconnect', () => process.exit(0))
// A signal to the whole group (Ctrl-C in a terminal) is the parent's to answer: it lets this chunk finish or ends it.
for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP'] as const) process.on(signal, () => undefined)

const send = (reply: Reply) => process.send?.(reply)
const yieldToMessages = () => new Promise<void>(resolve => setImmediate(resolve))

process.on('message', (task: Task) => {
  const before = process.cpuUsage()
  const used = () => {
    const { user, system } = process.cpuUsage(before)
    return user + system
  }
  perform(task, used).then(send, (error: unknown) => {
    send({ kind: 'refused', message: error instanceof Error ? error.message : String(error), cpuMicros: used() })
  })
})

async function perform(task: Task, used: () => number): Promise<Reply> {
  if (task.kind === 'chunk') {
    const payload = await integrate(task, used)
    return { kind: 'chunk', payload, cpuMicros: used() }
  }
  if (task.kind === 'calibrate') {
    const secondsPerTrialStep = measurePrice()
    return { kind: 'calibrate', secondsPerTrialStep, cpuMicros: used() }
  }
  const { answer, paths } = mergeChunks(task.spec, task.parts)
  return { kind: 'merge', answer: JSON.stringify(answer), headline: answer.words.headline, paths: packPaths(answer, paths), cpuMicros: used() }
}

async function integrate({ spec, firstTrial, trialCount }: Extract<Task, { kind: 'chunk' }>, used: () => number): Promise<Uint8Array> {
  const run = openChunk(spec, firstTrial, trialCount)
  let reported = performance.now()
  while (run.done < run.total) {
    const sliceEnd = performance.now() + SLICE_MS
    while (run.done < run.total && performance.now() < sliceEnd) run.advance()
    if (performance.now() - reported >= REPORT_MS) {
      reported = performance.now()
      send({ kind: 'progress', share: run.done / run.total, cpuMicros: used() })
    }
    await yieldToMessages()
  }
  return run.finish()
}
