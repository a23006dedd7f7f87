import { Pause } from './patience'

const SLOWEST = 2

/** A thing done over and over. `poke` has the next round come at once; `stopped` resolves when the last one has ended. */
export interface Repetition { poke: () => void, stopped: Promise<void> }

/**
 * Does `work` every so many milliseconds until `stop`, one round at a time. A round that throws is reported to `onError`
 * and the next ones come half as often until one succeeds.
 */
export function repeat(everyMs: number, stop: AbortSignal, work: () => Promise<unknown>, onError: (error: unknown) => void): Repetition {
  const pause = new Pause()
  let poked = false
  const rounds = async () => {
    let slow = 1
    // The first round may poke: it begins when the caller has what it pokes.
    await Promise.resolve()
    while (!stop.aborted) {
      poked = false
      try {
        await work()
        slow = 1
      }
      catch (error) {
        onError(error)
        slow = Math.min(SLOWEST, slow * 2)
      }
      if (!poked) await pause.wait(everyMs * slow, stop)
    }
  }
  return {
    poke() {
      poked = true
      pause.end()
    },
    stopped: rounds(),
  }
}
