/** A user with work to hand out. CPU microseconds. */
export interface Contender {
  userId: string
  /** What the user has been handed so far. */
  virtualTime: number
}

/** Least share of the slots' count that is kept ready ahead of free slots, so that no slot waits for the dispatcher. */
const AHEAD = 0.5

/** How many chunks may be handed out now: one for each free slot and a few ahead, fewer than would make newcomers wait. */
export function room({ slots, running, queued }: { slots: number, running: number, queued: number }): number {
  const wanted = Math.max(0, slots - running) + Math.ceil(AHEAD * slots)
  return Math.max(0, wanted - queued)
}

/**
 * The user to serve next: the one whose next chunk would start first in virtual time. `now` is the virtual time that
 * the system has reached: whoever was idle starts from there and saves up no claim. Ties go to the first in the list.
 */
export function nextContender<T extends Contender>(contenders: readonly T[], now: number): T | undefined {
  let best: T | undefined
  for (const contender of contenders) {
    if (!best || Math.max(contender.virtualTime, now) < Math.max(best.virtualTime, now)) best = contender
  }
  return best
}

/** Virtual time of a user after being handed a chunk of `cost` CPU microseconds. */
export const afterServing = (virtualTime: number, now: number, cost: number): number => Math.max(virtualTime, now) + cost
