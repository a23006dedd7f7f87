import { randomBytes } from 'node:crypto'

const DIGITS = '0123456789ABCDEFGHJKMNPQRSTVWXYZ'

let lastTime = -1
let lastTail: number[] = []

/**
 * A new 26-character ULID: 48 bits of milliseconds, then 80 random bits.
 * Ids made by one process sort in the order they were made, also within a millisecond and when the clock steps back.
 */
export function newId(now = Date.now()): string {
  if (now > lastTime) {
    lastTime = now
    lastTail = Array.from(randomBytes(16), byte => byte & 31)
  }
  else {
    increment(lastTail)
  }
  let head = ''
  for (let rest = lastTime, place = 0; place < 10; place++) {
    head = DIGITS[rest % 32]! + head
    rest = Math.floor(rest / 32)
  }
  return head + lastTail.map(digit => DIGITS[digit]!).join('')
}

function increment(tail: number[]) {
  for (let place = tail.length - 1; place >= 0; place--) {
    if (tail[place]! < 31) {
      tail[place]!++
      return
    }
    tail[place] = 0
  }
}
