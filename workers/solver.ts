import { fork, spawnSync } from 'node:child_process'
import type { ChildProcess, ForkOptions } from 'node:child_process'
import { usageOf } from './processTable'
import { replySchema } from './protocol'
import type { Reply, Task } from './protocol'

const HEAP_MEGABYTES = 512
const MEMORY_LIMIT_BYTES = 1024 ** 3
const SAMPLE_MS = 500
/** A solver that has said nothing for so much CPU time, or for so long, is stuck. */
const SILENT_CPU_MICROS = 60e6
const SILENT_MS = 180_000

/** How a task ended. `refused`: by the engine or a limit; the same would happen again. `died`: the process ended under it. */
export type Outcome = Exclude<Reply, { kind: 'progress' }> | { kind: 'died', message: string, cpuMicros: number }

/** A task under way. */
interface Run {
  cpuLimitMicros: number
  startCpuMicros: number
  cpuMicros: number
  share: number
  heardAt: number
  heardCpuMicros: number
  settle: (outcome: Outcome) => void
}

/**
 * One solver process, kept warm between tasks and replaced when it ends. It dies with this process: the kernel sees to it
 * where `setpriv` is installed, and it ends by itself when the channel closes.
 */
export class Solver {
  private child: ChildProcess | null = null
  private run: Run | null = null
  private closed = false

  /** `script`: path of the built compute process. */
  constructor(private readonly script: string) {}

  /** Starts the process ahead of its first task. */
  warm(): void {
    if (!this.child && !this.closed) this.child = this.start()
  }

  /** Share done, 0 to 1, and CPU microseconds used of the task under way. */
  get progress(): { share: number, cpuMicros: number } {
    return { share: this.run?.share ?? 0, cpuMicros: this.run?.cpuMicros ?? 0 }
  }

  /** Runs one task to its end; never throws. */
  perform(task: Task, cpuLimitSeconds: number): Promise<Outcome> {
    this.warm()
    const { child } = this
    if (!child || this.run) return Promise.resolve({ kind: 'died', message: 'the solver was not free', cpuMicros: 0 })
    return new Promise((resolve) => {
      const startCpuMicros = child.pid === undefined ? 0 : usageOf(child.pid)?.cpuMicros ?? 0
      const sampler = setInterval(() => this.sample(), SAMPLE_MS)
      this.run = {
        cpuLimitMicros: cpuLimitSeconds * 1e6, startCpuMicros, cpuMicros: 0, share: 0, heardAt: performance.now(), heardCpuMicros: 0,
        settle: (outcome) => {
          clearInterval(sampler)
          this.run = null
          resolve(outcome)
        },
      }
      child.send(task, (error) => {
        if (error && child === this.child) this.end('it could not be given its task')
      })
    })
  }

  /** Ends the process at once; a task under way ends as `died` with this reason. The next task gets a new process. */
  end(reason: string): void {
    const { child } = this
    if (!child) return
    this.readUsage()
    this.lose(child, reason)
    child.kill('SIGKILL')
  }

  /** Ends the process for good. */
  close(): void {
    this.closed = true
    this.end('its worker was shut down')
  }

  private start(): ChildProcess {
    const options: ForkOptions = { serialization: 'advanced', stdio: ['ignore', 'inherit', 'inherit', 'ipc'] }
    const node = [`--max-old-space-size=${HEAP_MEGABYTES}`]
    const child = canBindToParent()
      ? fork(this.script, [], { ...options, execPath: 'setpriv', execArgv: ['--pdeathsig', 'KILL', process.execPath, ...node] })
      : fork(this.script, [], { ...options, execArgv: node })
    child.on('message', message => this.hear(child, message))
    child.on('error', error => this.lose(child, `its process could not be reached (${error.message})`))
    child.on('exit', (code, signal) => this.lose(child, signal ? `its process was ended by ${signal}` : `its process ended with code ${code}`))
    return child
  }

  private hear(child: ChildProcess, message: unknown): void {
    const { run } = this
    if (child !== this.child || !run) return
    const { data: reply } = replySchema.safeParse(message)
    if (!reply) return this.end('it answered what is no answer')
    run.cpuMicros = Math.max(run.cpuMicros, reply.cpuMicros)
    if (reply.kind !== 'progress') return run.settle(reply)
    run.share = reply.share
    run.heardAt = performance.now()
    run.heardCpuMicros = run.cpuMicros
  }

  private lose(child: ChildProcess, message: string): void {
    if (child !== this.child) return
    this.child = null
    this.run?.settle({ kind: 'died', message, cpuMicros: this.run.cpuMicros })
  }

  /** Brings the use of the task up to date; answers the memory held, bytes. */
  private readUsage(): number {
    const usage = this.child?.pid === undefined ? null : usageOf(this.child.pid)
    if (usage && this.run) this.run.cpuMicros = Math.max(this.run.cpuMicros, usage.cpuMicros - this.run.startCpuMicros)
    return usage?.residentBytes ?? 0
  }

  private sample(): void {
    const memory = this.readUsage()
    const { run } = this
    if (!run) return
    if (run.cpuMicros > run.cpuLimitMicros) {
      this.refuse(`A part of this job used ${Math.round(run.cpuMicros / 1e6)} CPU-seconds, more than the ${Math.round(run.cpuLimitMicros / 1e6)} that its estimate allows.`)
    }
    else if (memory > MEMORY_LIMIT_BYTES) {
      this.refuse(`A part of this job needed more than ${MEMORY_LIMIT_BYTES / 1024 ** 2} MiB of memory.`)
    }
    else if (run.cpuMicros - run.heardCpuMicros > SILENT_CPU_MICROS || performance.now() - run.heardAt > SILENT_MS) {
      this.end('it made no progress')
    }
  }

  private refuse(message: string): void {
    this.run?.settle({ kind: 'refused', message, cpuMicros: this.run.cpuMicros })
    this.end(message)
  }
}

let bindable: boolean | undefined
/** Whether children can be started so that the kernel ends them when their parent ends. */
function canBindToParent(): boolean {
  bindable ??= spawnSync('setpriv', ['--pdeathsig', 'KILL', 'true'], { stdio: 'ignore' }).status === 0
  return bindable
}
