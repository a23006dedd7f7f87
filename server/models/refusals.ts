/** The price is more than what is left of the user's quota. CPU-seconds. */
export class QuotaExceeded extends Error {
  constructor(readonly predictedCpuSeconds: number, readonly leftCpuSeconds: number) {
    super('The job costs more than what is left of the quota.')
    this.name = 'QuotaExceeded'
  }
}

/** The price is more than any job may cost. CPU-seconds. */
export class PriceOverCap extends Error {
  constructor(readonly predictedCpuSeconds: number, readonly capCpuSeconds: number) {
    super('The job costs more than any job may.')
    this.name = 'PriceOverCap'
  }
}

/** The user sent this idempotency key before, with another job. */
export class IdempotencyKeyReused extends Error {
  constructor() {
    super('This Idempotency-Key was used for another job.')
    this.name = 'IdempotencyKeyReused'
  }
}

/** The job is to be made from a preset, or a version of one, that the user does not have. */
export class NoSuchPreset extends Error {
  constructor(readonly part: 'preset' | 'version') {
    super(part === 'preset' ? 'There is no such preset for you.' : 'This preset has no such version.')
    this.name = 'NoSuchPreset'
  }
}

/** An edit that started from a version which is not the newest any more. */
export class StaleVersion extends Error {
  constructor() {
    super('It was changed in the meantime.')
    this.name = 'StaleVersion'
  }
}

/** The link of a mail was used, replaced or taken back, is too old, or never was one. */
export class LinkNotValid extends Error {
  constructor() {
    super('The link is not valid.')
    this.name = 'LinkNotValid'
  }
}

/** Something stands against it in the present state; the message says what, for whoever asked. */
export class InTheWay extends Error {
  override name = 'InTheWay'
}

/** Whoever asked was an admin when the request began and is none now. */
export class NoLongerAdmin extends Error {
  constructor() {
    super('You are not an admin any more.')
    this.name = 'NoLongerAdmin'
  }
}
