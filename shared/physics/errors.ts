/** The numbers are well-formed but describe no device or run that can be computed; `path` leads to the field at fault. */
export class PhysicsError extends Error {
  constructor(readonly path: readonly (string | number)[], message: string) {
    super(message)
    this.name = 'PhysicsError'
  }
}

/** A run that left the numbers: NaN or overflow. The message names the trial and the region of parameters where it happened. */
export class RunFailure extends Error {
  constructor(readonly trial: number, region: string) {
    super(`Trial ${trial} left the sphere (NaN or overflow) at ${region}. No number of this run is kept; a shorter fixed step or a smaller drive may carry it.`)
    this.name = 'RunFailure'
  }
}
