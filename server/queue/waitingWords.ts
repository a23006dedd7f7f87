import type { WaitReason } from '#shared/schemas/waiting'

/** Why a job waits, in a sentence for whoever reads it. */
export function waitingWords(reason: WaitReason, { slots, ownBefore }: { slots: number, ownBefore: number }): string {
  if (reason === 'noWorkers') return 'No worker is connected. The job is kept and starts as soon as one is.'
  if (reason === 'mending') return 'The queue is being put right after a fault and goes on by itself.'
  if (reason === 'starting') return 'It is next: a solver takes it in a moment.'
  if (reason === 'own') return ownBefore === 1 ? 'An earlier job of the same person comes first.' : `${ownBefore} earlier jobs of the same person come first.`
  if (reason === 'share') return 'Others come first in the fair order: they have been given less CPU time so far.'
  return slots === 1 ? 'The only slot is busy.' : slots === 2 ? 'Both slots are busy.' : `All ${slots} slots are busy.`
}
