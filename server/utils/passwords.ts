import { passwordFault } from '#shared/utils/passwordRules'
import { HttpProblem } from './problems'

/** Hashes computed at a time (each takes a thread of the pool and about 90 ms) and requests that may wait for one. */
const PARALLEL = 2
const WAITING = 60

let running = 0
const queue: (() => void)[] = []

async function takeTurn(): Promise<void> {
  if (running < PARALLEL) {
    running++
    return
  }
  if (queue.length >= WAITING) throw new HttpProblem('unavailable', {}, { 'Retry-After': '5' })
  await new Promise<void>(resolve => queue.push(resolve))
}

function passTurn(): void {
  const next = queue.shift()
  if (next) next()
  else running--
}

let unmatched: Promise<string> | undefined

/** Makes the hash that unknown accounts are compared with, so that the first of them takes no longer than the next. */
export const prepareUnmatched = (): Promise<string> => unmatched ??= hashPassword('no account has this password')

/**
 * Hash of a password that its owner has chosen, after comparing it with the owner's own name and address.
 * @throws HttpProblem invalid at /password, unavailable
 */
export async function hashChosen(password: string, own: readonly string[]): Promise<string> {
  const fault = passwordFault(password, own)
  if (fault) throw new HttpProblem('invalid', { errors: [{ pointer: '/password', detail: fault }] })
  await takeTurn()
  try {
    return await hashPassword(password)
  }
  finally {
    passTurn()
  }
}

/** Whether a password belongs to a stored hash. Takes the same time for no hash at all. @throws HttpProblem unavailable */
export async function checkPassword(hash: string | undefined, password: string): Promise<boolean> {
  await takeTurn()
  try {
    const matches = await verifyPassword(hash ?? await prepareUnmatched(), password)
    return matches && hash !== undefined
  }
  finally {
    passTurn()
  }
}
