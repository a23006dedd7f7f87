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
