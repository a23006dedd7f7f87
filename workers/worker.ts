import { setMaxListeners } from 'node:events'
import os from 'node:os'
import { fileURLToPath } from 'node:url'
import { Worker } from 'bullmq'
import type { Settings } from '#shared/schemas/settings'
import { smtpTransport } from '../server/mail/transport'
import { closeDatabase, openDatabase } from '../server/models/database'
import { openChunkQueue } from '../server/queue/chunkQueue'
import { consumerConnection } from '../server/queue/connection'
import { signOff, worksOn } from '../server/queue/fleet'
import { CHUNK_QUEUE, QUEUE_PREFIX, chunkMessageSchema } from '../server/queue/names'
import { Assignments } from './assignments'
import { calibrateOnce } from './calibrate'
import { mergeAside, runChunk } from './chunks'
import { takePart } from './leader'
import type { Logger } from './log'
import { troubleReporter } from './log'
import { Pause } from './patience'
import { repeat } from './repeat'
import { Solver } from './solver'

const LOCK_MS = 15_000
const STALLED_CHECK_MS = 5000
const HEARTBEAT_MS = 2000
const WATCH_MS = 500
/** How long chunks may go on after a request to end, and how long each step of closing may take. */
const FINISH_MS = 5000
const CLOSE_MS = 2000

/** A worker at work. */
export interface RunningWorker {
  /** Takes no more chunks, lets those under way finish or hands them back, and closes everything. At most about 10 s. */
  drain: () => Promise<void>
}

/** Starts a worker; it goes on while the database or Redis are away, and takes up work when they are back. */
export function startWorker(settings: Settings, workerId: string, log: Logger): RunningWorker {
  const script = fileURLToPath(new URL('./compute.mjs', import.meta.url))
  const trouble = troubleReporter(log)
  const stopping = new AbortController()
  const stop = stopping.signal
  setMaxListeners(0, stop)
  const db = openDatabase(settings.database)
  const queue = openChunkQueue(settings.redis, trouble('queue unreachable'))
  const assignments = new Assignments()
  const solvers = Array.from({ length: settings.workerSlots }, () => new Solver(script))
  const every = [...solvers]
  const workshop = { db, workerId, log, assignments, solvers, stop }
  const identity = { id: workerId, host: os.hostname().slice(0, 255), pid: process.pid, slots: settings.workerSlots }

  const mail = settings.mail && { transport: smtpTransport(settings.mail.url), from: settings.mail.from, baseUrl: settings.baseUrl }
  if (!mail) log.warn('FARPOLE_MAIL_URL is not set: no mail is sent')
  const leadership = takePart({ db, queue, workerId, merge: mergeAside(script), mail, log }, stop)
  const consumer = new Worker(CHUNK_QUEUE, async (job) => {
    await runChunk(workshop, chunkMessageSchema.parse(job.data))
    leadership.poke()
  }, {
    autorun: false, connection: consumerConnection(settings.redis), prefix: QUEUE_PREFIX, concurrency: settings.workerSlots,
    lockDuration: LOCK_MS, stalledInterval: STALLED_CHECK_MS, removeOnComplete: { count: 0 }, removeOnFail: { count: 0 },
  })
  consumer.on('error', trouble('queue trouble'))
  consumer.on('failed', (_, error) => trouble('message failed')(error))

  const begun = calibrateOnce(db, script, log, stop).catch(trouble('calibration failed')).then(() => {
    if (stop.aborted) return []
    for (const solver of every) solver.warm()
    consumer.run().catch(trouble('queue stopped'))
    log.info({ slots: settings.workerSlots }, 'ready')
    return [
      repeat(HEARTBEAT_MS, stop, async () => {
        await worksOn(db, identity)
        await assignments.beat(db)
      }, trouble('heartbeat failed')),
      repeat(WATCH_MS, stop, () => assignments.watch(db), trouble('watching failed')),
    ]
  })

  const drain = async () => {
    const closed = consumer.close()
    await Promise.race([closed, new Pause().wait(FINISH_MS, stop)])
    assignments.release()
    await atMost(CLOSE_MS, closed.catch(trouble('closing failed')))
    stopping.abort()
    for (const solver of every) solver.close()
    const loops = (await begun).map(loop => loop.stopped)
    await atMost(CLOSE_MS, Promise.all([...loops, leadership.stopped]))
    await atMost(CLOSE_MS, signOff(db, workerId).catch(trouble('signing off failed')))
    await atMost(CLOSE_MS, queue.close().catch(trouble('closing failed')))
    await atMost(CLOSE_MS, closeDatabase(db).catch(trouble('closing failed')))
  }
  let drained: Promise<void> | undefined
  return { drain: () => drained ??= drain() }
}

const atMost = (milliseconds: number, work: Promise<unknown>) =>
  Promise.race([work, new Promise<void>((resolve) => { setTimeout(resolve, milliseconds).unref() })])
