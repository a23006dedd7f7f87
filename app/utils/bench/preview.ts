import type { DerivedNumber } from '#shared/physics/derived'
import type { Landscape } from '#shared/numerics/boltzmann'
import type { Plan } from '#shared/physics/tally'
import type { DeterministicPath } from '#shared/schemas/answer'
import type { FailureRule, JobSpec } from '#shared/schemas/job'
import type { WriteErrorCurve } from '#shared/physics/writeError'

export interface PreviewNumbers { spec: JobSpec, numbers: DerivedNumber[], cautions: string[], energy: Landscape, plan: Plan, cpuSeconds: number }
export interface PreviewPath { spec: JobSpec, path: DeterministicPath, elapsedMs: number }
/** Write errors without sampling error, or in words why there are none. */
export interface PreviewErrors { spec: JobSpec, rule: FailureRule, solution: { curve: WriteErrorCurve, error: number } | null, reason: string | null, elapsedMs: number }

/** What counts as a failure where the question does not say. */
export const FAILURE_RULE: FailureRule = 'afterSettling'

export interface PreviewRequest { id: number, spec: JobSpec, secondsPerTrialStep: number }
export type PreviewReply = { id: number } & (
  | { kind: 'numbers', numbers: PreviewNumbers }
  | { kind: 'path', path: PreviewPath }
  | { kind: 'errors', errors: PreviewErrors }
  | { kind: 'refused', path: (string | number)[], message: string }
  | { kind: 'failed', message: string }
)

/** What a worker must have: the browser's own, or any that a test brings. */
export interface PreviewWorker {
  postMessage: (request: PreviewRequest) => void
  terminate: () => void
  onmessage: ((event: { data: PreviewReply }) => void) | null
  onerror: ((event: { message: string }) => void) | null
}

/** A running worker that keeps a newer question waiting longer than this is given up. */
const PATIENCE_MS = 300

/**
 * Asks one thing at a time, always the newest: what arrives while the worker computes replaces what waits; replies to a question
 * that was replaced are dropped; a worker lost in a long path is ended and a fresh one asked.
 */
export class PreviewQueue {
  private worker: PreviewWorker | null = null
  private running: PreviewRequest | null = null
  private waiting: PreviewRequest | null = null
  private timer: ReturnType<typeof setTimeout> | undefined
  private last = 0

  constructor(private readonly start: () => PreviewWorker, private readonly reply: (reply: PreviewReply) => void) {}

  ask(spec: JobSpec, secondsPerTrialStep: number) {
    const request = { id: ++this.last, spec, secondsPerTrialStep }
    if (this.running === null) return this.send(request)
    this.waiting = request
    this.timer ??= setTimeout(() => this.giveUp(), PATIENCE_MS)
  }

  /** Nothing asked so far is of interest any more. */
  forget() {
    this.waiting = null
    this.last++
  }

  end() {
    clearTimeout(this.timer)
    this.worker?.terminate()
    this.worker = null
    this.running = this.waiting = null
  }

  private send(request: PreviewRequest) {
    this.running = request
    this.worker ??= this.open()
    this.worker.postMessage(request)
  }

  private open(): PreviewWorker {
    const worker = this.start()
    worker.onmessage = ({ data }) => {
      if (worker !== this.worker) return
      if (data.id === this.last) this.reply(data)
      if (data.kind !== 'numbers' && data.kind !== 'path') this.next()
    }
    worker.onerror = ({ message }) => {
      if (worker !== this.worker) return
      this.reply({ id: this.last, kind: 'failed', message })
      this.next()
    }
    return worker
  }

  private next() {
    clearTimeout(this.timer)
    this.timer = undefined
    this.running = null
    const request = this.waiting
    this.waiting = null
    if (request) this.send(request)
  }

  private giveUp() {
    this.worker?.terminate()
    this.worker = null
    this.next()
  }
}
