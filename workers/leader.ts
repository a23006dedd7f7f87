import type { MailOffice } from '../server/mail/deliver'
import { deliverDue, dropWaiting, pruneMail } from '../server/mail/deliver'
import type { Database } from '../server/models/database'
import { pruneEvents } from '../server/models/events'
import { pruneOld } from '../server/models/prune'
import { grantResets } from '../server/models/reset'
import type { ChunkQueue } from '../server/queue/chunkQueue'
import { dispatch } from '../server/queue/dispatch'
import { forgetSilentWorkers } from '../server/queue/fleet'
import { foretell, nothingForetold, prunePredictions } from '../server/queue/foretell'
import { LEASE_SECONDS, holdLease, yieldLease } from '../server/queue/lease'
import type { Merge } from '../server/queue/merge'
import { announceProgress } from '../server/queue/progress'
import { fenceSilent, mergeFinished, requeueLost, settleEnded } from '../server/queue/reconcile'
import type { Logger } from './log'
import { troubleReporter } from './log'
import { repeat } from './repeat'

const LEASE = 'dispatcher'
/** After an outage, or taking over, how long others get to show that they are alive before they count as silent. */
const GRACE_MS = 5000

/** The part of a worker that may lead: one worker of all hands out chunks and mends what faults have left. */
export interface Leadership {
  /** Hands out chunks at once when this worker leads. */
  poke: () => void
  /** Resolves when all has ended after `stop`; the lease is given back. */
  stopped: Promise<void>
}

/** Takes part in the election until `stop`, and leads while elected. */
export function takePart(
  { db, queue, workerId, merge, mail, log }: { db: Database, queue: ChunkQueue, workerId: string, merge: Merge, mail: MailOffice | null, log: Logger }, stop: AbortSignal,
): Leadership {
  const trouble = troubleReporter(log)
  const told = new Map<string, string>()
  const foretold = nothingForetold()
  const mergeFailures = new Map<string, number>()
  let heldUntil = -Infinity
  let heldSince = Infinity
  const leads = () => performance.now() < heldUntil
  const steady = () => leads() && performance.now() - heldSince > GRACE_MS

  const elect = async () => {
    const asked = performance.now()
    const led = leads()
    const held = await holdLease(db, LEASE, workerId)
    if (held && !led) {
      heldSince = asked
      log.info('leading')
    }
    heldUntil = held ? asked + LEASE_SECONDS * 1000 : -Infinity
  }
  const whileLeading = (everyMs: number, what: string, work: () => Promise<unknown>, when = leads) =>
    repeat(everyMs, stop, async () => { if (when()) await work() }, trouble(`${what} failed`))

  const election = repeat(2000, stop, elect, trouble('election failed'))
  const dispatching = whileLeading(200, 'handing out chunks', () => dispatch(db, queue))
  const rest = [
    whileLeading(1000, 'ending silent attempts', async () => {
      const { fenced, givenUp } = await fenceSilent(db)
      if (fenced > 0) log.warn({ fenced, givenUp }, 'attempts ended whose worker is silent')
    }, steady),
    whileLeading(1000, 'finding lost messages', async () => {
      const requeued = await requeueLost(db, queue)
      if (requeued > 0) log.warn({ requeued }, 'messages found lost')
    }),
    whileLeading(2000, 'settling', () => settleEnded(db)),
    whileLeading(2000, 'merging', () => mergeFinished(db, merge, mergeFailures)),
    whileLeading(1000, 'telling progress', () => announceProgress(db, told)),
    whileLeading(1000, 'foretelling', () => foretell(db, foretold)),
    whileLeading(1000, 'granting new passwords', () => grantResets(db)),
    whileLeading(1000, 'sending mail', async () => {
      const { postponed, givenUp } = mail ? await deliverDue(db, mail, stop) : { postponed: 0, givenUp: await dropWaiting(db) }
      if (postponed + givenUp > 0) log.warn({ postponed, givenUp }, 'mail not sent')
    }),
    whileLeading(60_000, 'cleaning up', async () => {
      await pruneEvents(db)
      await pruneOld(db)
      await prunePredictions(db)
      await pruneMail(db)
      await forgetSilentWorkers(db)
    }),
  ]
  const stopped = Promise.all([election, dispatching, ...rest].map(part => part.stopped)).then(async () => {
    if (leads()) await yieldLease(db, LEASE, workerId).catch(trouble('giving back the lease failed'))
  })
  return { poke: dispatching.poke, stopped }
}
